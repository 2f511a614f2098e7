"""Files whose lines are entries: structures as JSON Lines, and lists of paths."""

from __future__ import annotations

import codecs
import json
import os
from collections.abc import Callable, Iterator
from gzip import GzipFile
from typing import IO, Final

from sitesym.errors import ReadingError, SitesymError
from sitesym.screening.sources.texts import (
    LARGEST_ENTRY_BYTES,
    STREAM_ERRORS,
    broken_stream,
    open_bytes,
    storable,
    too_large_entry,
)
from sitesym.screening.work import WorkItem

#: Fields of a line that may hold the structure, and the format they stand for.
TEXT_FIELDS: Final = {"poscar": "vasp", "cif": "cif"}


def jsonl_items(path: str) -> Iterator[WorkItem]:
    """One unit for each line of JSON Lines: ``id``, and the text of the structure in ``poscar`` or ``cif``.

    Other fields are left alone, empty lines as well. A line that is not so is a unit with its error.
    """
    source = os.path.abspath(path)
    for number, line in _lines(path):
        frame = f"line {number}"
        fallback = f"{storable(os.path.basename(path))}#{number}"
        try:
            if isinstance(line, SitesymError):
                raise line
            yield _structure(line, source, frame)
        except SitesymError as error:
            yield WorkItem.of_error(source, frame, fallback, error.in_file(storable(path)))


def listed_items(path: str, items_of: Callable[[str, str], Iterator[WorkItem]]) -> Iterator[WorkItem]:
    """Units of each path of a list, one path a line, relative to the folder of the list.

    ``items_of`` gives the units of a path and its name; the name is the path as it stands in the list.
    """
    folder = os.path.dirname(os.path.abspath(path))
    for number, line in _lines(path):
        if isinstance(line, bytes) and b"\0" in line:
            line = _no_path(line)
        if isinstance(line, SitesymError):
            name = f"{storable(os.path.basename(path))}#{number}"
            yield WorkItem.of_error(os.path.abspath(path), f"line {number}", name, line)
        else:
            entry = os.fsdecode(line.removeprefix(codecs.BOM_UTF8).rstrip(b"\r\n"))
            yield from items_of(os.path.join(folder, entry), storable(entry))


def _lines(path: str) -> Iterator[tuple[int, bytes | SitesymError]]:
    """Number and bytes of each line that is not blank, or the error of a line; a broken stream ends them."""
    number = 0
    try:
        with open_bytes(path) as stream:
            while line := stream.readline(LARGEST_ENTRY_BYTES):
                number += 1
                if len(line) == LARGEST_ENTRY_BYTES:
                    yield number, too_large_entry("the line", _skip_line(stream, len(line)), path)
                elif line.strip():
                    yield number, line
    except STREAM_ERRORS as error:
        yield number + 1, broken_stream(path, error)


def _skip_line(stream: IO[bytes] | GzipFile, size: int) -> int:
    """Read on to the end of the line; its size in bytes."""
    while (piece := stream.readline(LARGEST_ENTRY_BYTES)) and not piece.endswith(b"\n"):
        size += len(piece)
    return size + len(piece)


def _no_path(line: bytes) -> ReadingError:
    rule, step = "a path holds no NUL character", "write the list as text in UTF-8"
    return ReadingError("the line is no path", repr(line[:80]), rule, step)


def _structure(line: bytes, source: str, frame: str) -> WorkItem:
    entry = _json_object(line)
    given = [name for name in TEXT_FIELDS if entry.get(name) is not None]
    identity = entry.get("id")
    if not isinstance(identity, str | int) or isinstance(identity, bool) or identity == "":
        raise _not_an_entry("the line gives no id", f"id: {identity!r}", "add a field id with a text")
    if len(given) != 1 or not isinstance(entry[given[0]], str):
        raise _not_an_entry(
            f"the line of {storable(str(identity))!r} gives no structure",
            f"fields: {', '.join(storable(name) for name in entry)}",
            "give the structure in one of the two fields",
        )
    text = str(entry[given[0]])
    return WorkItem.of_text(source, frame, storable(str(identity)), text, TEXT_FIELDS[given[0]])


def _json_object(line: bytes) -> dict[str, object]:
    try:
        entry = json.loads(line.decode("utf-8-sig"))
    except (ValueError, RecursionError) as error:
        raise _not_an_entry(
            "the line is not JSON", f"{type(error).__name__}: {error}", "correct it"
        ) from error
    if not isinstance(entry, dict):
        raise _not_an_entry("the line is no JSON object", type(entry).__name__, "write {...} in each line")
    return entry


def _not_an_entry(what: str, value: str, next_step: str) -> ReadingError:
    rule = f"each line is a JSON object with id and one of {', '.join(TEXT_FIELDS)}, all texts"
    return ReadingError(what, value, rule, next_step)
