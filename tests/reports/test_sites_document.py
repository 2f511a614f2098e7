"""The `sites` document: strict JSON, complete, and consistent with itself."""

import csv
import io
import json
from pathlib import Path

import numpy as np
import pytest

from sitesym.crystals import find_symmetry, read_crystal
from sitesym.reports.layout import vector_text
from sitesym.reports.render import FORMATS, render
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


@pytest.mark.parametrize("format_name", FORMATS)
def test_every_format_keeps_operations_positions_and_directions_of_axes(format_name):
    document = document_of("quartz_SiO2.cif")
    text = render(document, format_name).replace("\\", "")
    silicon = document["sites"][0]
    direction = vector_text(silicon["axes"][0]["direction_file"]).strip("( )")
    for operation in silicon["operations"]:
        assert operation["name"] in text
        assert operation["xyz"] in text
    if format_name != "json":
        assert " ".join(f"{value:.6f}" for value in silicon["position_conventional"]) in text
        assert " ".join(direction.split()) in " ".join(text.split())


def test_rows_of_csv_are_those_of_the_document():
    document = document_of("zincblende_GaAs.cif")
    rows = list(csv.DictReader(io.StringIO(render(document, "csv"))))
    assert [row["label"] for row in rows] == ["Ga1", "As1"]
    for row, site in zip(rows, document["sites"], strict=True):
        assert row["operations"].count(";") == site["order"] - 1
        vectors = {entry.split(": ")[1] for entry in row["axes_file"].split("; ")}
        assert vectors == {" ".join(f"{v:.6f}" for v in axis["direction_file"]) for axis in site["axes"]}
