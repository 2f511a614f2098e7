"""What a symmetry finder reports, whichever library it is, and the space-group setting it refers to."""

from __future__ import annotations

from dataclasses import dataclass

from sitesym.arrays import FloatArray, IntArray


@dataclass(frozen=True, eq=False)
class SpaceGroupSetting:
    """A space group in one choice of axes and origin.

    ``rotations`` (n, 3, 3) integers and ``translations`` (n, 3): all operations of the conventional cell,
    centring translations included. ``point_rotations`` (k, 3, 3): the rotation parts, each once, identity
    first.
    """

    number: int
    symbol: str
    hall_number: int
    hall_symbol: str
    choice: str
    rotations: IntArray
    translations: FloatArray
    point_rotations: IntArray


@dataclass(frozen=True, eq=False)
class FoundSymmetry:
    """Answer of a symmetry finder for n atoms.

    ``transformation`` P (3, 3) and ``origin_shift`` p (3,): x_conventional = P x_file + p (modulo 1).
    ``conventional_positions`` (n, 3): idealised position of each file atom in the conventional cell.
    ``orbits`` (n,): equal for atoms related by the space group, translations of a supercell included.
    ``multiplicities`` (n,): atoms of the orbit in the conventional cell. ``wyckoffs`` and ``site_symbols``:
    one for each atom. ``finder``: name and version of the library.
    """

    setting: SpaceGroupSetting
    transformation: FloatArray
    origin_shift: FloatArray
    conventional_positions: FloatArray
    orbits: IntArray
    multiplicities: IntArray
    wyckoffs: tuple[str, ...]
    site_symbols: tuple[str, ...]
    finder: str
