"""The `sites` document: strict JSON, complete, and consistent with itself."""

import json
from pathlib import Path

import numpy as np
import pytest

from sitesym.crystals import find_symmetry, read_crystal
from sitesym.reports.sites import sites_document

STRUCTURES = Path(__file__).parents[2] / "structures"
CRYSTAL_FIELDS = {
    "formula",
    "atoms",
    "space_group_number",
    "space_group",
    "hall_number",
    "point_group",
    "tolerance_angstrom",
}
SITE_FIELDS = {
    "label",
    "species",
    "atoms",
    "multiplicity",
    "wyckoff",
    "site_symmetry",
    "point_group",
    "order",
    "has_inversion",
    "has_mirror",
    "polar",
    "operations",
    "axes",
}


def document_of(file):
    return sites_document(find_symmetry(read_crystal(STRUCTURES / file)))


@pytest.mark.parametrize(
    "file", sorted(p.name for p in STRUCTURES.iterdir() if p.suffix in (".cif", ".vasp"))
)
def test_every_document_is_strict_json_with_the_fields_promised(file):
    document = document_of(file)
    assert json.loads(json.dumps(document, allow_nan=False)) == document
    assert document["schema"] == "sitesym.sites/1"
    assert set(document["crystal"]) >= CRYSTAL_FIELDS
    assert all(set(site) >= SITE_FIELDS for site in document["sites"])
    atoms = sorted(atom for site in document["sites"] for atom in site["atoms"])
    assert atoms == list(range(document["crystal"]["atoms"]))
    assert all(len(site["operations"]) == site["order"] for site in document["sites"])
    assert document["versions"]["spglib"]


def test_texts_of_site_operations_are_the_matrices_beside_them():
    gemmi = pytest.importorskip("gemmi")
    for site in document_of("corundum_Al2O3.cif")["sites"]:
        position = site["position_conventional"]
        for operation in site["operations"]:
            read = gemmi.Op(operation["xyz"])
            assert np.array_equal(np.array(read.rot) // read.DEN, operation["rotation_frac"])
            assert np.allclose(read.apply_to_xyz(position), position)


def test_directions_in_file_axes_and_in_the_lattice_are_the_same():
    document = document_of("rutile_TiO2.cif")
    lattice = np.array(document["crystal"]["conventional_lattice"])
    for site in document["sites"]:
        assert site["axes"]
        for axis in site["axes"]:
            text = axis["direction_lattice"].strip("[]").replace("-1", "n")
            indices = np.array([-1 if digit == "n" else int(digit) for digit in text])
            direction = indices @ lattice
            assert np.allclose(direction / np.linalg.norm(direction), axis["direction_file"])


def test_an_average_structure_is_called_one():
    assert any("average structure" in remark for remark in document_of("perovskite_BaSrTiO3.cif")["remarks"])
    assert not any("average" in remark for remark in document_of("perovskite_SrTiO3.cif")["remarks"])
