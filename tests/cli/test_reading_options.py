"""Options that choose a structure of a file, a statement of symmetry, and what tells atoms apart."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from ase.build import bulk
from ase.io import write
from click.testing import Result

Run = Callable[..., Result]
Call = Callable[..., dict[str, Any]]

BLOCK = """data_{name}
_cell_length_a {edge}
_cell_length_b {edge}
_cell_length_c {edge}
_cell_angle_alpha 90
_cell_angle_beta 90
_cell_angle_gamma 90
_space_group_name_H-M_alt '{symbol}'
_space_group_IT_number {number}
loop_
_atom_site_label
_atom_site_type_symbol
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
Fe1 Fe2+ 0 0 0
Fe2 Fe3+ 0.5 0.5 0.5
"""


@pytest.fixture
def blocks(tmp_path: Path) -> str:
    """Path of a CIF with two data blocks."""
    first = BLOCK.format(name="small", edge=2.8, symbol="P m -3 m", number=221)
    second = BLOCK.format(name="large", edge=2.9, symbol="P m -3 m", number=221)
    (tmp_path / "two.cif").write_text(first + second)
    return str(tmp_path / "two.cif")


def test_without_a_choice_several_blocks_are_an_error_that_names_them(run: Run, blocks: str) -> None:
    result = run("sites", blocks)
    assert result.exit_code == 3
    assert "data block small; data block large" in result.output
    assert "--frame" in result.output
    assert "--block" in result.output


@pytest.mark.parametrize("choice", [("--block", "large"), ("--frame", "last"), ("--frame", "2")])
@pytest.mark.parametrize("command", ["sites", "allowed", "irreps"])
def test_a_block_is_chosen_by_name_or_number(
    document: Call, blocks: str, command: str, choice: tuple[str, str]
) -> None:
    crystal = document(command, blocks, *choice)["crystal"]
    assert crystal["part"].startswith("data block large")
    assert crystal["lattice"][0][0] == pytest.approx(2.9)


def test_atoms_are_told_apart_on_request(document: Call, blocks: str) -> None:
    plain = document("sites", blocks, "--block", "small")
    charged = document("sites", blocks, "--block", "small", "--distinguish", "oxidation,label")
    assert plain["crystal"]["space_group"] == "Im-3m"
    assert plain["crystal"]["distinguished_by"] == ["element", "occupancy"]
    assert charged["crystal"]["space_group"] == "Pm-3m"
    assert charged["crystal"]["distinguished_by"] == ["element", "occupancy", "oxidation", "label"]


def test_a_wrong_mark_is_a_usage_error(run: Run, blocks: str) -> None:
    result = run("sites", blocks, "--block", "small", "--distinguish", "colour")
    assert result.exit_code == 2
    assert "isotope, oxidation, label, moment" in result.output


def test_a_contradiction_is_settled_by_the_statement_to_believe(
    run: Run, document: Call, tmp_path: Path
) -> None:
    path = tmp_path / "odd.cif"
    path.write_text(BLOCK.format(name="odd", edge=2.8, symbol="P m -3 m", number=1))
    result = run("sites", str(path))
    assert result.exit_code == 3
    assert "--symmetry-from hm or --symmetry-from number" in result.output
    believed = document("sites", str(path), "--symmetry-from", "number")
    assert believed["crystal"]["part"] == "data block odd; symmetry from the space group number 1"


def test_symmetry_from_is_refused_where_there_is_no_cif(run: Run, structures: str) -> None:
    result = run("sites", f"{structures}/quartz_SiO2.vasp", "--symmetry-from", "hall")
    assert result.exit_code == 2
    for word in (
        "quartz_SiO2.vasp: only a CIF",
        "value: symmetry from hall, format vasp",
        "rule",
        "next step",
    ):
        assert word in result.stderr


@pytest.fixture
def left_handed(tmp_path: Path) -> str:
    """Path of a wurtzite whose a and b are exchanged."""
    atoms = bulk("ZnO", "wurtzite", a=3.25, c=5.2)
    atoms.set_cell(atoms.cell.array[[1, 0, 2]], scale_atoms=False)
    write(tmp_path / "left.extxyz", atoms)
    return str(tmp_path / "left.extxyz")


@pytest.mark.parametrize("command", ["sites", "allowed"])
def test_a_left_handed_cell_is_remarked_upon(
    document: Call, left_handed: str, structures: str, command: str
) -> None:
    answer = document(command, left_handed)
    (remark,) = (remark for remark in answer["remarks"] if "left-handed" in remark)
    assert "their triple product is below zero" in remark
    assert answer["crystal"]["space_group"] == "P6_3mc"
    right = document(command, f"{structures}/wurtzite_ZnO.cif")
    assert not any("left-handed" in remark for remark in right["remarks"])


class TestScreen:
    """The same options for many files."""

    FAST = ("--ladder", "off", "--workers", "1")

    @pytest.fixture
    def folder(self, tmp_path: Path, blocks: str, left_handed: str) -> str:
        """A CIF of two blocks, one that contradicts itself, and three files with three frames each."""
        (tmp_path / "odd.cif").write_text(BLOCK.format(name="odd", edge=2.8, symbol="P m -3 m", number=1))
        frames = [bulk(name, "fcc", a=4.0) for name in ("Al", "Cu", "Ag")]
        for name in ("frames.extxyz", "frames.traj", "frames.db"):
            write(tmp_path / name, frames)
        return str(tmp_path)

    def rows(self, document: Call, folder: str, *options: str) -> dict[str, dict[str, Any]]:
        found = {row["id"]: row for row in document("screen", folder, *self.FAST, *options)["rows"]}
        assert found["left.extxyz"]["status"] == "ok"
        return found

    def test_without_options_every_structure_is_a_row(self, document: Call, folder: str) -> None:
        found = self.rows(document, folder)
        assert len(found) == 2 + 1 + 1 + 9
        assert found["odd.cif"]["error_code"] == "space-group-statement"
        assert found["two.cif#data block small"]["space_group"] == "Im-3m"
        assert "left-handed" in found["left.extxyz"]["remarks"]

    def test_atoms_are_told_apart(self, document: Call, folder: str) -> None:
        found = self.rows(document, folder, "--distinguish", "oxidation")
        assert found["two.cif#data block small"]["space_group"] == "Pm-3m"
        assert "told apart by element, occupancy, oxidation" in found["two.cif#data block small"]["remarks"]

    def test_the_statement_to_believe_counts_for_cifs_alone(self, document: Call, folder: str) -> None:
        found = self.rows(document, folder, "--symmetry-from", "number")
        assert found["odd.cif"]["space_group"] == "Im-3m"
        assert {row["status"] for row in found.values()} == {"ok"}

    @pytest.mark.parametrize(("frame", "formula"), [("last", "Ag"), ("2", "Cu")])
    def test_one_frame_of_each_file(self, document: Call, folder: str, frame: str, formula: str) -> None:
        """Also of those that are otherwise cut apart unread; a file that has no such frame is an error."""
        found = {row["id"]: row for row in document("screen", folder, *self.FAST, "--frame", frame)["rows"]}
        assert {name: row["formula"] for name, row in found.items() if "frames" in name} == dict.fromkeys(
            ("frames.db", "frames.extxyz", "frames.traj"), formula
        )
        assert found["two.cif"]["atoms"] == 2
        assert found["left.extxyz"]["error_code"] == (None if frame == "last" else "empty")

    def test_other_options_do_the_rows_of_a_store_again(self, run: Run, folder: str, tmp_path: Path) -> None:
        def done(*options: str) -> str:
            result = run("screen", folder, *self.FAST, "--store", str(tmp_path / "rows.store"), *options)
            assert result.exit_code == 0, result.output
            return str(result.stdout).splitlines()[0]

        first = done("--distinguish", "label,oxidation")
        assert first.startswith("13 structures")
        assert done("--distinguish", "oxidation", "--distinguish", "label").startswith(
            "10 done before, 0 now"
        )
        assert done("--distinguish", "oxidation").startswith("13 structures")
        assert done("--symmetry-from", "hm").startswith("13 structures")
        assert done("--frame", "last").startswith("6 structures")

    def test_settings_stand_in_every_document(self, run: Run, folder: str) -> None:
        options = ("--distinguish", "moment", "--symmetry-from", "hall", "--frame", "last")
        for name in ("text", "markdown", "latex"):
            shown = " ".join(run("screen", folder, *self.FAST, *options, "--format", name).stdout.split())
            for words in (
                "finder spglib; tolerance ladder off", "told apart by element, occupancy, moment",
                "of several structures in a file the last", "symmetry of CIFs from hall alone",
            ):  # fmt: skip
                assert words in shown, name

    @pytest.mark.parametrize(
        ("option", "value"), [("--distinguish", "colour"), ("--symmetry-from", "hope"), ("--frame", "0")]
    )
    def test_what_means_nothing_is_a_usage_error(
        self, run: Run, folder: str, option: str, value: str
    ) -> None:
        result = run("screen", folder, *self.FAST, option, value)
        assert (result.exit_code, value in result.stderr) == (2, True)
