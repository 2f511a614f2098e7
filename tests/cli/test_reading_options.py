"""Options that choose a structure of a file, a statement of symmetry, and what tells atoms apart."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
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
