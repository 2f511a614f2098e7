"""One structure to its row: symmetry, verdicts, counts of independent components, or the error.

Only what the columns need is computed. A verdict is a count of invariant components that is not zero.
"""

from __future__ import annotations

from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import FoundSymmetry
from sitesym.crystals.reliability import examined_symmetry
from sitesym.crystals.remarks import remarks_on_crystal
from sitesym.crystals.symmetry import CrystalSymmetry
from sitesym.errors import SymmetryError
from sitesym.screening.columns import Row
from sitesym.screening.facts import GroupFacts, chirality, facts_of, polar_text
from sitesym.screening.failures import blank_row, joined
from sitesym.screening.settings import Settings
from sitesym.screening.verdicts import reliability_columns, reliability_remarks
from sitesym.screening.work import WorkItem


def crystal_row(item: WorkItem, name: str, crystal: Crystal, settings: Settings) -> Row:
    """The row of a crystal called ``name`` in its item, without ``seconds``.

    Raises SitesymError when its symmetry cannot be settled.
    """
    symmetry = examined_symmetry(crystal, settings.tolerance_angstrom, settings.finder, settings.ladder)
    row = blank_row(item, name, settings)
    row |= _identification(symmetry)
    facts = facts_of(symmetry.setting, settings.properties)
    row |= facts.cells | {"polar_axis": _polar_axis(facts, symmetry)}
    row |= _sites(symmetry.found)
    row |= reliability_columns(symmetry.reliability)
    return row | {"remarks": joined(_remarks(symmetry)), "status": "ok"}


def _polar_axis(facts: GroupFacts, symmetry: CrystalSymmetry) -> str | None:
    return polar_text(facts, symmetry.measured_lattice) if len(facts.polar_directions_frac) else None


def _identification(symmetry: CrystalSymmetry) -> Row:
    crystal, setting = symmetry.crystal, symmetry.setting
    sohncke, chiral_type = chirality(setting)
    return {
        "formula": crystal.formula,
        "atoms": len(crystal),
        "space_group_number": setting.number,
        "space_group": setting.symbol,
        "declared_space_group": crystal.declared_space_group or None,
        "hall_number": setting.hall_number,
        "sohncke": sohncke,
        "chiral_space_group": chiral_type,
    }


def _sites(found: FoundSymmetry) -> Row:
    """Orbits, and the symbols of the site groups of highest and lowest order.

    The order of a site group is that of the space group in the conventional cell over the multiplicity.
    """
    total = len(found.setting.rotations)
    multiplicities = found.multiplicities.tolist()
    leading = list(dict.fromkeys(found.orbits.tolist()))
    if any(total % multiplicities[atom] for atom in leading):
        raise SymmetryError(
            "an orbit does not fit the space group",
            f"multiplicities {sorted({multiplicities[atom] for atom in leading})}; {total} operations",
            "the multiplicity of an orbit divides the number of operations of the conventional cell",
            "try another tolerance; the atoms are near a more symmetric arrangement",
        )
    leading.sort(key=lambda atom: (multiplicities[atom], found.wyckoffs[atom]))
    return {
        "distinct_sites": len(leading),
        "highest_site_symmetry": found.site_symbols[leading[0]],
        "lowest_site_symmetry": found.site_symbols[leading[-1]],
    }


def _remarks(symmetry: CrystalSymmetry) -> tuple[str, ...]:
    """What was noticed on reading and by the finders, and what makes the symmetry less than certain."""
    said = (f"the finder says: {line}" for line in symmetry.found.messages)
    return (*remarks_on_crystal(symmetry.crystal), *said, *reliability_remarks(symmetry.reliability))
