"""What a screening run came to, in a few lines: counts, verdicts, failures by code with examples."""

from __future__ import annotations

from collections.abc import Iterator

from sitesym.screening.tally import COUNTED_VERDICTS, Tally


def counts_line(tally: Tally) -> str:
    """How many structures, by status."""
    counted = ", ".join(
        f"{number} {status}" for status, number in sorted(tally.statuses.items(), reverse=True)
    )
    if not counted:
        return "0 structures: no input holds a file whose name stands for a structure format"
    return f"{tally.rows} structure{'' if tally.rows == 1 else 's'} ({counted})"


def verdicts_line(tally: Tally) -> str:
    """How many have each verdict; those whose symmetry is fragile apart."""
    parts = []
    for verdict in COUNTED_VERDICTS:
        fragile = f" + {tally.fragile[verdict]} fragile" if tally.fragile[verdict] else ""
        parts.append(f"{verdict.replace('_', ' ')} {tally.hits[verdict]}{fragile}")
    return ", ".join(parts)


def summary_lines(tally: Tally) -> Iterator[str]:
    """The counts, the verdicts, and for each error code its number and examples."""
    yield counts_line(tally)
    yield verdicts_line(tally)
    for code, number in tally.failures.most_common():
        yield f"{code} {number}:"
        yield from (f"  {_one_line(example)}" for example in tally.examples[code])


def _one_line(text: str, longest: int = 160) -> str:
    shown = " ".join("".join(letter if letter.isprintable() else " " for letter in text).split())
    return shown if len(shown) <= longest else f"{shown[: longest - 3]}..."
