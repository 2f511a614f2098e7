"""Reader of POSCAR texts, the format since VASP 5: coordinates are taken as written, with no detour.

The parts of the format: comment; one or three scale factors (one below zero is the volume); three cell
vectors; element symbols; counts; a line 'Selective dynamics' or none; 'Direct' or 'Cartesian'; one line of
coordinates an atom. What follows (velocities) says nothing about the structure.
"""

from __future__ import annotations

import re
from typing import NoReturn

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.crystals.crystal import Crystal, Source
from sitesym.crystals.marks import Marks
from sitesym.crystals.species import ISOTOPES, Species
from sitesym.crystals.validation import fractional
from sitesym.errors import (
    CountMismatchError,
    EmptyStructureError,
    NotANumberError,
    ReadingError,
    SingularCellError,
    UnknownFormatError,
)

# Line 6 names potentials in some files: Ti_pv, or Ti/ with a checksum.
_SYMBOL = re.compile(r"([A-Z][a-z]?)(?=[_/.\d]|$)")


def read_poscar(text: str, file: str) -> Crystal:
    """The crystal of a POSCAR text; ``file`` is the name that goes into its source.

    Raises UnknownFormatError for a text without element symbols, and the other ReadingError classes.
    """
    lines = text.splitlines()
    if len(lines) < 8:
        raise EmptyStructureError(
            "the POSCAR ends before its atoms",
            f"{len(lines)} lines",
            "comment, scale, three vectors, symbols, counts, Direct or Cartesian, coordinates",
            "complete the file",
        )
    scales = _scale_factors(lines[1])
    lattice = _numbers(lines[2:5], 3, "cell vector")
    factor = _factor(scales, lattice)
    symbols, counts = _symbols(lines[5]), _counts(lines[6], lines[5])
    start = 8 if lines[7].strip()[:1].lower() == "s" else 7
    style = _style(lines[start] if len(lines) > start else "")
    rows = lines[start + 1 : start + 1 + sum(counts)]
    if len(rows) < sum(counts):
        _count_mismatch(f"{len(rows)} lines of coordinates for {sum(counts)} atoms")
    positions = _numbers(rows, 3, "the position of atom")
    cell = lattice * factor
    if style in ("c", "k"):
        positions = fractional(cell, positions * factor)
    names = [symbol for symbol, count in zip(symbols, counts, strict=True) for _ in range(count)]
    return Crystal(
        cell,
        positions,
        tuple(Species.pure(ISOTOPES.get(name, name)) for name in names),
        source=Source(file, "vasp"),
        marks=_isotopes(names),
    )


def _scale_factors(line: str) -> FloatArray:
    tokens = line.split()
    count = 3 if len(tokens) >= 3 and all(map(_is_number, tokens[:3])) else 1
    scales: FloatArray = _numbers([line], count, "scale factor")[0]
    if not (np.isfinite(scales).all() and scales.all()) or (count == 3 and scales.min() < 0.0):
        raise SingularCellError(
            "the scale factor leaves no cell",
            line.strip(),
            "one finite number other than zero, or three above zero",
            "correct line 2",
        )
    return scales


def _factor(scales: FloatArray, lattice: FloatArray) -> FloatArray:
    """What Cartesian x, y, z are multiplied by, (1,) or (3,); a scale below zero is minus the volume."""
    if scales[0] > 0.0:
        return scales
    volume = abs(float(np.linalg.det(lattice)))
    if volume == 0.0:
        raise SingularCellError(
            "the cell vectors span no volume",
            "volume 0",
            "a, b and c are not in one plane",
            "correct the cell",
        )
    factor: FloatArray = np.cbrt(-scales / volume)
    return factor


def _symbols(line: str) -> list[str]:
    tokens = line.split("!")[0].split()
    if tokens and all(token.isdigit() for token in tokens):
        raise UnknownFormatError(
            "a POSCAR without element symbols",
            f"line 6 is '{line.strip()}'",
            "the element symbols stand in the line before the counts (the format since VASP 5)",
            "insert the symbols as line 6; they are not guessed from the comment",
        )
    matches = [(token, _SYMBOL.match(token)) for token in tokens]
    unknown = [token for token, match in matches if match is None]
    if unknown or not tokens:
        raise ReadingError(
            "an atom of no known element",
            f"line 6 is '{line.strip()}'",
            "line 6 names the elements",
            "correct line 6",
        )
    return [match.group(1) for _, match in matches if match is not None]


def _counts(line: str, symbols_line: str) -> list[int]:
    tokens = line.split("!")[0].split()
    if not tokens or not all(token.isascii() and token.isdigit() and len(token) < 10 for token in tokens):
        _count_mismatch(f"line 7 is '{line.strip()}'")
    counts = [int(token) for token in tokens]
    if len(counts) != len(symbols_line.split("!")[0].split()):
        _count_mismatch(f"elements '{symbols_line.strip()}', counts '{line.strip()}'")
    if sum(counts) == 0:
        raise EmptyStructureError(
            "the structure has no atoms", line.strip(), "a crystal has at least one atom", "correct line 7"
        )
    return counts


def _style(line: str) -> str:
    """First letter of the line before the coordinates; c and k mean Cartesian, any other letter Direct."""
    style = line.strip()[:1].lower()
    if not style.isalpha():
        raise ReadingError(
            "the POSCAR does not say what its coordinates are",
            f"'{line.strip()}' stands before the coordinates",
            "a line Direct or Cartesian follows the counts",
            "insert the line",
        )
    return style


def _numbers(lines: list[str], count: int, what: str) -> FloatArray:
    """(len(lines), count) numbers, the first of each line; exponents may be written with D."""
    rows = [line.split()[:count] for line in lines]
    short = next((number for number, row in enumerate(rows, start=1) if len(row) < count), None)
    if short is not None:
        _count_mismatch(f"{what} {short} is '{lines[short - 1].strip()}'")
    try:
        return np.array(rows, dtype=np.float64)
    except ValueError:
        rows = [[token.replace("D", "E").replace("d", "e") for token in row] for row in rows]
    faulty = next((number for number, row in enumerate(rows) if not all(map(_is_number, row))), None)
    if faulty is None:
        return np.array(rows, dtype=np.float64)
    raise NotANumberError(
        "a value is not a number",
        f"{what} {faulty + 1} is '{lines[faulty].strip()}'",
        f"{count} numbers at the start of the line",
        "correct the line",
    )


def _is_number(token: str) -> bool:
    try:
        float(token)
    except ValueError:
        return False
    return True


def _isotopes(names: list[str]) -> Marks:
    if not any(name in ISOTOPES for name in names):
        return {}
    return {"isotope": tuple(name if name in ISOTOPES else "" for name in names)}


def _count_mismatch(value: str) -> NoReturn:
    raise CountMismatchError(
        "numbers are missing in the POSCAR",
        value,
        "one count an element, three numbers a vector and an atom",
        "look for missing or doubled entries",
    )
