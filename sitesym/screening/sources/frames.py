"""Frames of an extended XYZ file, cut apart without being parsed."""

from __future__ import annotations

import os
from collections.abc import Iterator
from itertools import chain
from typing import IO

from sitesym.errors import CountMismatchError, SitesymError
from sitesym.screening.sources.texts import LARGEST_ENTRY_BYTES, broken_stream, storable, too_large_entry
from sitesym.screening.work import WorkItem


def frame_items(path: str, identity: str) -> Iterator[WorkItem]:
    """One unit for each frame. A file with one frame, or with a first frame that is broken, is one unit."""
    source = os.path.abspath(path)
    try:
        with open(path, "rb") as stream:
            frames = _frames(stream, path)
            first, second = next(frames, None), next(frames, None)
            if first is None or second is None or isinstance(first, SitesymError):
                yield WorkItem.of_path(path, identity, size_bytes=os.stat(path).st_size)
                return
            for number, frame in enumerate(chain((first, second), frames), start=1):
                yield _item(source, f"structure {number}", f"{identity}#{number}", frame)
    except OSError as error:
        yield WorkItem.of_error(source, "", identity, broken_stream(path, error))


def _item(source: str, frame: str, identity: str, text: bytes | SitesymError) -> WorkItem:
    if isinstance(text, SitesymError):
        return WorkItem.of_error(source, frame, identity, text)
    return WorkItem.of_text(source, frame, identity, text.decode("utf-8", errors="replace"), "extxyz")


def _frames(stream: IO[bytes], path: str) -> Iterator[bytes | SitesymError]:
    """Each frame: a line with the number of atoms, a comment, the atoms. An error ends the frames, because
    nothing says where the next one begins."""
    while head := stream.readline(LARGEST_ENTRY_BYTES):
        if not head.strip():
            continue
        if not head.strip().isdigit():
            yield _broken(f"'{head[:40].decode('utf-8', errors='replace').strip()}'", path)
            return
        frame = _frame(stream, head, path)
        yield frame
        if isinstance(frame, SitesymError):
            return


def _frame(stream: IO[bytes], head: bytes, path: str) -> bytes | SitesymError:
    # One text that grows: of a hostile file with tiny lines a list of them would be ten times as large.
    text, lines, wanted = bytearray(head), 1, int(head.strip()[:12]) + 2
    while lines < wanted:
        line = stream.readline(LARGEST_ENTRY_BYTES)
        if len(text) + len(line) > LARGEST_ENTRY_BYTES:
            return too_large_entry("the frame", len(text) + len(line), path)
        if not line:
            return _broken(f"the file ends after {lines} of {wanted} lines of a frame", path)
        text += line
        lines += 1
    return bytes(text)


def _broken(value: str, path: str) -> CountMismatchError:
    return CountMismatchError(
        "a frame of the file is broken; what follows it is not read",
        value,
        "each frame is the number of its atoms, a comment, and one line for each atom",
        "correct the frame",
        storable(path),
    )
