"""What a library written in C or Fortran prints to standard error, kept instead of shown.

Such a library writes to file descriptor 2 past Python. The descriptor belongs to the whole process, so this
is for a program, a command or a worker, that owns its process; a library call must not do it.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from tempfile import TemporaryFile
from typing import Final

_STANDARD_ERROR: Final = 2


@contextmanager
def native_output_kept() -> Iterator[list[str]]:
    """Lines written to descriptor 2 meanwhile are in the list afterwards; none is shown.

    Messages of Python's own ``sys.stderr`` go the same way, since they share the descriptor.
    """
    lines: list[str] = []
    sys.stderr.flush()
    shown = os.dup(_STANDARD_ERROR)
    with TemporaryFile() as kept:
        os.dup2(kept.fileno(), _STANDARD_ERROR)
        try:
            yield lines
        finally:
            sys.stderr.flush()
            os.dup2(shown, _STANDARD_ERROR)
            os.close(shown)
            kept.seek(0)
            lines.extend(line for line in kept.read().decode("utf-8", "replace").splitlines() if line.strip())
