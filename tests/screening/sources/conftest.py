"""A small structure as text, and the units of work of a source in short."""

from __future__ import annotations

from collections.abc import Callable, Iterable

import pytest

from sitesym.screening.work import WorkItem

POSCAR = """CsCl
1.0
4.123 0 0
0 4.123 0
0 0 4.123
Cs Cl
1 1
Direct
0 0 0
0.5 0.5 0.5
"""


@pytest.fixture
def poscar() -> str:
    """Caesium chloride (structure as in structures/) as a POSCAR text."""
    return POSCAR


@pytest.fixture
def in_short() -> Callable[[Iterable[WorkItem]], list[tuple[str, str, str]]]:
    """Id, kind and error code of each unit of work."""
    return lambda items: [(item.identity, item.kind, item.error.code if item.error else "") for item in items]
