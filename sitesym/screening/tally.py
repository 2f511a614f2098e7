"""Counts of a screening run: verdicts with the fragile ones apart, and failures by code with examples."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from typing import Final

from sitesym.screening.columns import VERDICTS, Row

#: Columns whose yes is counted.
COUNTED_VERDICTS: Final = ("centrosymmetric", "sohncke", "chiral_space_group", "polar", *VERDICTS)
#: Failures shown for each code.
EXAMPLES: Final = 3


@dataclass
class Tally:
    """``statuses``: rows by status. ``hits`` and ``fragile``: rows with the verdict whose symmetry is robust
    (or was not examined), and fragile. ``failures``: rows by error code, ``examples``: the first few."""

    rows: int = 0
    statuses: Counter[str] = field(default_factory=Counter)
    hits: Counter[str] = field(default_factory=Counter)
    fragile: Counter[str] = field(default_factory=Counter)
    failures: Counter[str] = field(default_factory=Counter)
    examples: dict[str, list[str]] = field(default_factory=dict)

    def add(self, row: Row) -> None:
        """Count a row."""
        self.rows += 1
        self.statuses[str(row["status"])] += 1
        if row["status"] != "ok":
            code = str(row["error_code"])
            self.failures[code] += 1
            known = self.examples.setdefault(code, [])
            if len(known) < EXAMPLES:
                known.append(f"{row['id']}: {row['error_message']}")
            return
        counter = self.fragile if row["stability"] == "fragile" else self.hits
        counter.update(verdict for verdict in COUNTED_VERDICTS if row[verdict])

    @property
    def failed(self) -> int:
        """Rows that are not ok."""
        return self.rows - self.statuses["ok"]
