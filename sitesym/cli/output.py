"""How results leave the program: text to standard output or a file, and what happens when it cannot."""

from __future__ import annotations

import contextlib
import os
import signal
import sys
from collections.abc import Iterable, Iterator
from typing import IO, Final

import click

from sitesym.errors import UsageError

#: Exit code where whoever read standard output has closed it, as after `head`: the shell's for that signal.
EXIT_READER_GONE: Final = 128 + signal.SIGPIPE


def write(text: str, output: str | None) -> None:
    """Write a text to standard output or to a file, see `write_pieces`."""
    write_pieces((text,), output)


def write_pieces(pieces: Iterable[str], output: str | None) -> None:
    """Write pieces of text as they come, to standard output (None) or to a file; line ends stay as they are.

    Raises UsageError when they cannot be written. Where the reader of standard output is gone, the program
    ends with `EXIT_READER_GONE`: it has seen enough. What making a piece raises is passed on as it is.
    """
    if output is None:
        if sys.stdout is None:
            raise _unwritable("standard output is closed")
        _write_all(pieces, sys.stdout)
        return
    with output_errors(output):
        stream = open(output, "w", encoding="utf-8", newline="")  # noqa: SIM115  closed below
    try:
        _write_all(pieces, stream, output)
    except BaseException:
        with contextlib.suppress(OSError):
            stream.close()
        raise
    with output_errors(output):
        stream.close()


def say(text: str) -> None:
    """A line on standard error, beside the results; nothing stops because nobody can read it."""
    with contextlib.suppress(OSError):
        click.echo(text, err=True)


@contextlib.contextmanager
def output_errors(output: str | None) -> Iterator[None]:
    """Errors of the operating system and of encoding while writing to a file or to standard output (None),
    as `write_pieces` says.
    """
    try:
        yield
    except UnicodeEncodeError as error:
        raise UsageError(
            "the output cannot be written",
            f"{error.object[error.start : error.end]!a} in the encoding {error.encoding}",
            "an encoding that has every character of the output",
            "name a file with --output, which is UTF-8, or set PYTHONIOENCODING=utf-8",
        ) from error
    except BrokenPipeError:
        if output is not None:
            raise
        _drop_standard_output()
        sys.exit(EXIT_READER_GONE)
    except OSError as error:
        if output is None:
            _drop_standard_output()
        raise _unwritable(error.strerror or str(error), output) from error


def _write_all(pieces: Iterable[str], stream: IO[str], output: str | None = None) -> None:
    for piece in pieces:
        with output_errors(output):
            stream.write(piece)
    with output_errors(output):
        stream.flush()


def _drop_standard_output() -> None:
    """What is left in the buffer goes nowhere; the interpreter would try to write it again at its end."""
    with contextlib.suppress(OSError, ValueError):
        place, nowhere = sys.stdout.fileno(), os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, place)
        os.close(nowhere)


def _unwritable(reason: str, output: str | None = None) -> UsageError:
    return UsageError(
        "the output cannot be written",
        reason,
        "a place that can be written",
        "make space, or name another file with --output",
        output or "",
    )
