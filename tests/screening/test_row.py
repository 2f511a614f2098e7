"""A structure becomes a row: every column, verdicts counted, axes in the file's frame."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

import numpy as np
import pytest
from ase.io import read, write

from sitesym.crystals import find_symmetry, read_crystal
from sitesym.crystals.spglib_finder import setting
from sitesym.errors import SitesymError
from sitesym.groups import PointGroup
from sitesym.groups.symbols import SCHOENFLIES
from sitesym.screening import Row, Settings, WorkItem
from sitesym.screening.columns import DEFAULT_PROPERTIES, VERDICTS, count_column
from sitesym.screening.contents import read_item
from sitesym.screening.facts import chirality, facts_of
from sitesym.screening.row import crystal_row
from sitesym.tensors import independent_count, kind

STRUCTURES = Path(__file__).parents[2] / "structures"
FAST = Settings(ladder=False)


def row_of(path: Path, settings: Settings = FAST) -> Row:
    """The row of the only structure of a file."""
    item = WorkItem.of_path(path, path.name)
    ((name, crystal),) = read_item(item, {})
    assert not isinstance(crystal, SitesymError)
    return crystal_row(item, name, crystal, settings)


def test_a_row_has_every_column_in_order() -> None:
    row = row_of(STRUCTURES / "quartz_SiO2.cif", Settings(properties=("elastic-compliance",)))
    names = [column.name for column in Settings(properties=("elastic-compliance",)).columns]
    assert list(row) == names
    assert row["count_elastic_compliance"] == 6


@pytest.mark.parametrize(
    "name", ["quartz_SiO2.cif", "spinel_MgAl2O4.cif", "kdp_KH2PO4.cif", "pzt_PbZrTiO3.cif"]
)
def test_sites_of_a_row_are_those_of_the_crystal(name: str) -> None:
    """The row takes orders from multiplicities; `sites` counts the operations that fix each position."""
    row, symmetry = row_of(STRUCTURES / name), find_symmetry(read_crystal(STRUCTURES / name))
    orders = {site.symbol: site.order for site in symmetry.sites}
    assert row["distinct_sites"] == len(symmetry.sites)
    assert orders[str(row["highest_site_symmetry"])] == max(orders.values())
    assert orders[str(row["lowest_site_symmetry"])] == min(orders.values())


@pytest.mark.parametrize("name", sorted(path.name for path in STRUCTURES.glob("*.cif")))
def test_verdicts_and_counts_are_those_of_the_point_group_of_the_crystal(name: str) -> None:
    row = row_of(STRUCTURES / name)
    group = find_symmetry(read_crystal(STRUCTURES / name)).point_group
    for verdict, kind_name in VERDICTS.items():
        assert row[verdict] == (independent_count(kind(kind_name), group) > 0)
    for kind_name in DEFAULT_PROPERTIES:
        assert row[count_column(kind_name)] == independent_count(kind(kind_name), group)
    assert (row["point_group"], row["centrosymmetric"]) == (group.oriented, group.has_inversion)


@pytest.mark.parametrize("name", ["wurtzite_ZnO.vasp", "barium_titanate_BaTiO3.vasp"])
def test_the_polar_axis_turns_with_the_crystal(name: str, tmp_path: Path) -> None:
    """The file's axes are turned by a rotation; the axis must be the turned one, up to its sense."""
    turn = np.linalg.qr(np.random.default_rng(7).normal(size=(3, 3)))[0]
    atoms = read(STRUCTURES / name)
    before = np.array(str(row_of(STRUCTURES / name)["polar_axis"]).split(), dtype=float)
    atoms.set_cell(atoms.cell.array @ turn.T, scale_atoms=True)
    write(tmp_path / "turned.vasp", atoms, format="vasp")
    after = np.array(str(row_of(tmp_path / "turned.vasp")["polar_axis"]).split(), dtype=float)
    np.testing.assert_allclose(abs(after @ (turn @ before)), 1.0, atol=1e-5)


def test_polar_directions_of_classes_without_a_single_axis() -> None:
    """Class m: any direction in the mirror plane; class 1: any. Nye (1957), table 21 gives the components."""
    found = {
        symbol: len(facts_of(setting(hall), ()).polar_directions_frac)
        for symbol, hall in (("1", 1), ("-1", 2), ("2", 3), ("m", 18), ("222", 108))
    }
    assert found == {"1": 3, "-1": 0, "2": 1, "m": 2, "222": 0}


def test_65_space_groups_lack_improper_operations_and_22_of_them_are_chiral() -> None:
    """The eleven enantiomorphic pairs of International Tables A, numbers from memory."""
    found = {setting(hall).number: chirality(setting(hall)) for hall in range(1, 531)}
    assert sum(sohncke for sohncke, _ in found.values()) == 65
    assert sorted(number for number, (_, chiral) in found.items() if chiral) == [
        76, 78, 91, 92, 95, 96, 144, 145, 151, 152, 153, 154, 169, 170, 171, 172, 178, 179, 180, 181,
        212, 213,
    ]  # fmt: skip


def test_the_number_of_classes_with_each_property() -> None:
    """20 piezoelectric, 10 pyroelectric, 15 optically active: Nye, Physical Properties of Crystals (1957)."""
    classes = {}
    for hall in range(1, 531):
        cells = facts_of(setting(hall), ()).cells
        classes[PointGroup.from_symbol(str(cells["point_group"])).schoenflies] = cells
    assert len(classes) == len(SCHOENFLIES) == 32
    having = Counter(name for cells in classes.values() for name, value in cells.items() if value is True)
    assert (having["piezoelectric"], having["pyroelectric"], having["polar"]) == (20, 10, 10)
    assert (having["optical_activity"], having["chiral_class"], having["centrosymmetric"]) == (15, 11, 11)


def test_the_ladder_calls_barium_titanate_fragile_only_near_the_cubic_phase() -> None:
    """P4mm up to 0.1 angstrom and Pm-3m at 0.2 for displacements of about 0.1 angstrom."""
    fine = row_of(STRUCTURES / "barium_titanate_BaTiO3.cif", Settings(tolerance_angstrom=0.001))
    coarse = row_of(STRUCTURES / "barium_titanate_BaTiO3.cif", Settings(tolerance_angstrom=0.2))
    assert (fine["stability"], fine["space_group"], fine["interval_high_angstrom"]) == ("robust", "P4mm", 0.1)
    assert coarse["space_group"] == "Pm-3m"
    assert 0.02 < float(str(fine["distance_to_centrosymmetric_angstrom"])) < 0.2
