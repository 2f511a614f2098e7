"""What a screening run says at its end."""

from __future__ import annotations

from sitesym.reports.screen_summary import counts_line
from sitesym.screening.tally import Tally


def test_a_run_that_found_nothing_says_why() -> None:
    assert counts_line(Tally()) == (
        "0 structures: no input holds a file whose name stands for a structure format"
    )


def test_one_structure_is_singular() -> None:
    tally = Tally()
    tally.rows, tally.statuses["ok"] = 1, 1
    assert counts_line(tally) == "1 structure (1 ok)"
