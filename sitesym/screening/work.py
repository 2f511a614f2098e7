"""A unit of work: one file, one archive member or one inline text, and what identifies its rows.

Sources of input make items, workers turn each into rows (several, where it holds several structures), and a
store remembers it by ``source`` and ``frame`` with the hash of its content. Items are small and survive
pickling; a file is opened by the worker, not by whoever makes the item.
"""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import dataclass
from hashlib import blake2b
from stat import S_ISREG
from typing import Final, Literal, TypeAlias

from sitesym.errors import SitesymError

Kind: TypeAlias = Literal["path", "text", "bytes", "error"]

#: Roughly what one atom takes in a structure file (bytes), to share out work before anything is read.
BYTES_AN_ATOM: Final = 60
_BLOCK: Final = 1 << 20


@dataclass(frozen=True)
class WorkItem:
    """What one worker does in one go.

    ``source`` and ``frame`` together are unique: source is an absolute path, for a member of an archive the
    path of the archive, ``!`` and the member; frame is empty, or says which entry of a list, lines file or
    database. ``identity`` is the text of the column ``id``. Which of the other fields count depends on
    ``kind``. `path`: the file at ``source``. `text`: ``content``, in UTF-8. `bytes`: ``content`` of a file
    called ``name``. `error`: ``error`` says why there is nothing to read. ``file_format`` is one of
    `sitesym.formats.FORMATS`, empty where the name tells it. ``atoms_hint``: about how many atoms.
    """

    source: str
    frame: str
    identity: str
    kind: Kind
    content: bytes = b""
    name: str = ""
    file_format: str = ""
    atoms_hint: int = 1
    error: SitesymError | None = None

    @classmethod
    def of_path(
        cls, path: str | os.PathLike[str], identity: str, file_format: str = "", size_bytes: int = 0
    ) -> WorkItem:
        """The file at a path; ``size_bytes`` where it is known."""
        source = os.path.abspath(path)
        hint = 1 + size_bytes // BYTES_AN_ATOM
        name = os.path.basename(source)
        return cls(source, "", identity, "path", name=name, file_format=file_format, atoms_hint=hint)

    @classmethod
    def of_text(cls, source: str, frame: str, identity: str, text: str, file_format: str) -> WorkItem:
        """A structure given as text in a named format; a lone surrogate fails on reading."""
        content = text.encode("utf-8", errors="surrogatepass")
        hint = 1 + len(content) // BYTES_AN_ATOM
        return cls(source, frame, identity, "text", content, file_format=file_format, atoms_hint=hint)

    @classmethod
    def of_bytes(cls, source: str, frame: str, identity: str, name: str, content: bytes) -> WorkItem:
        """A file that is in memory, such as a member of an archive; ``name`` tells its format."""
        hint = 1 + len(content) // BYTES_AN_ATOM
        return cls(source, frame, identity, "bytes", content, name=name, atoms_hint=hint)

    @classmethod
    def of_error(cls, source: str, frame: str, identity: str, error: SitesymError) -> WorkItem:
        """Something that should have been a structure and cannot be read: it becomes a row all the same."""
        return cls(source, frame, identity, "error", error=error)


def storable(text: str) -> str:
    r"""The text with what UTF-8 cannot hold (undecodable bytes of a file name) written as escapes.

    >>> storable("a\udcff.cif")
    'a\\udcff.cif'
    """
    return text.encode("utf-8", errors="backslashreplace").decode("utf-8")


def content_hash(item: WorkItem) -> str:
    """32 hexadecimal digits for everything that decides an item's rows but the settings.

    A file is read in blocks; one that cannot be opened has the hash of the reason, so that it counts as
    changed when the reason goes away.
    """
    digest = blake2b(digest_size=16)
    for text in (item.identity, item.kind, item.name, item.file_format):
        digest.update(text.encode("utf-8", errors="surrogatepass") + b"\0")
    if item.kind == "error":
        digest.update(str(item.error).encode("utf-8", errors="surrogatepass"))
    elif item.kind != "path":
        digest.update(item.content)
    else:
        for block in _blocks(item.source):
            digest.update(block)
    return digest.hexdigest()


def _blocks(path: str) -> Iterator[bytes]:
    """The content of a file, or the reason why there is none; a pipe or a device is not read."""
    try:
        if not S_ISREG(os.stat(path).st_mode):
            yield b"no regular file"
            return
        with open(path, "rb", buffering=0) as stream:
            while block := stream.read(_BLOCK):
                yield block
    except OSError as error:
        yield f"errno {error.errno}".encode()
