"""`sitesym audit`: the demo, the formats, the exit codes, the projected tensors."""

from __future__ import annotations

import csv
import io
import json
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner, Result

from sitesym.cli.main import main

STRUCTURES = Path(__file__).parents[2] / "structures"
DEMO = STRUCTURES / "measurements" / "tensors.yaml"
COMPONENTS = STRUCTURES / "measurements" / "components.csv"
#: Fields that a record of the document has, whatever happened to it.
CONTRACT = {
    "id",
    "verdict",
    "quantity",
    "group",
    "stated",
    "best",
    "rivals",
    "index_symmetry",
    "forbidden",
    "relations",
    "equivalent_axes",
    "tensor_symmetry",
    "stability",
    "error",
}
CLEAN = {
    "id": "a",
    "crystal": "m-3m",
    "quantity": "permittivity",
    "unit": "1",
    "axes": "file",
    "values": [[9.8, 0, 0], [0, 9.8, 0], [0, 0, 9.8]],
}


def invoke(*arguments: object) -> Result:
    return CliRunner().invoke(main, ["audit", *map(str, arguments)])


def strict(text: str) -> Any:
    """JSON without NaN or infinity."""

    def refuse(name: str) -> None:
        raise AssertionError(name)

    return json.loads(text, parse_constant=refuse)


def written(folder: Path, *records: object) -> Path:
    path = folder / "records.jsonl"
    path.write_text("\n".join(json.dumps(record) for record in records), encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def demo() -> dict[str, Any]:
    """The demo's document."""
    result = invoke(DEMO, COMPONENTS, "--format", "json")
    assert result.exit_code == 1
    document: dict[str, Any] = strict(result.output)
    return document


def by_id(document: dict[str, Any]) -> dict[str, dict[str, Any]]:
    return {record["id"]: record for record in document["records"]}


def test_the_demo_gives_the_verdicts_its_remarks_announce(demo: dict[str, Any]) -> None:
    assert {name: record["verdict"] for name, record in by_id(demo).items()} == {
        "niobate-e": "consistent",
        "quartz-d": "consistent-otherwise",
        "titanate-d": "consistent-otherwise",
        "oxide-e": "violates",
        "rutile-c": "consistent",
        "rutile-s": "consistent",
        "spinel-c": "consistent",
        "niobate-eps": "consistent",
    }


def test_the_demo_names_what_is_wrong(demo: dict[str, Any]) -> None:
    records = by_id(demo)
    assert records["quartz-d"]["best"]["axes"].startswith("ieee, turned by")
    assert records["titanate-d"]["best"]["order"] == "11 22 33 12 23 13"
    slip = records["oxide-e"]["best"]["slip"]
    assert (slip["sort"], slip["entries"][0] in ("31", "32")) == ("sign", True)
    assert records["spinel-c"]["stability"]["answer"] == "unstable"
    assert "kbar" in records["spinel-c"]["warnings"][0]
    assert records["niobate-eps"]["stated"]["dof"] == 3
    assert [check["holds"] for check in demo["cross_checks"]] == [True]


def test_every_record_has_the_fields_of_the_contract(demo: dict[str, Any]) -> None:
    assert demo["schema"] == "sitesym.audit/1"
    for record in demo["records"]:
        assert set(record) >= CONTRACT
        assert set(record["stated"]) >= {"relative_residual", "chi2", "dof", "p_value"}
        assert set(record["best"]) >= {"axes", "rotation", "order", "factor", "relative_residual"}


def test_the_summary_counts_what_the_stated_axes_alone_would_have_said(demo: dict[str, Any]) -> None:
    summary = demo["summary"]
    assert (summary["records"], summary["verdicts"]["violates"], summary["errors"]) == (8, 1, 0)
    assert summary["violating_in_stated_axes_alone"] == 3


def test_the_first_line_of_the_text_is_the_verdict_and_the_second_what_to_do(tmp_path: Path) -> None:
    first, second = invoke(written(tmp_path, CLEAN)).output.splitlines()[:2]
    assert first.startswith("a: consistent: permittivity in class m-3m")
    assert second.startswith("  do: ")


def test_an_error_is_told_with_its_place_and_next_step(tmp_path: Path) -> None:
    result = invoke(written(tmp_path, CLEAN, CLEAN | {"id": "b", "quantity": "permitivity"}))
    assert result.exit_code == 0
    assert "b: error:" in result.output
    assert "line 2" in result.output
    assert "near: permittivity" in " ".join(result.output.split())
    assert "1 with errors" in " ".join(result.output.split())


def test_an_error_has_the_same_fields_in_json(tmp_path: Path) -> None:
    result = invoke(written(tmp_path, CLEAN | {"values": [[1]]}), "--format", "json")
    (record,) = strict(result.output)["records"]
    assert set(record) >= CONTRACT
    assert record["verdict"] is None
    assert record["error"]["code"] == "tensor-input"
    assert result.exit_code == 3


@pytest.mark.parametrize("content", ['{"id": "x"}', '[{"id": "x"}, 3]'])
def test_exit_is_3_when_no_record_is_understood(tmp_path: Path, content: str) -> None:
    path = tmp_path / "a.json"
    path.write_text(content, encoding="utf-8")
    result = invoke(path)
    assert result.exit_code == 3
    assert "error:" in result.stdout


@pytest.mark.parametrize("content", [None, "", "{", "[]"])
@pytest.mark.parametrize("format_name", ["text", "json"])
def test_a_file_that_cannot_be_read_is_an_error_on_standard_error(
    tmp_path: Path, content: str | None, format_name: str
) -> None:
    path = tmp_path / "a.json"
    if content is not None:
        path.write_text(content, encoding="utf-8")
    result = invoke(path, "--format", format_name)
    assert (result.exit_code, result.stdout) == (3, "")
    assert result.stderr.startswith(f"error: {path}: ")
    assert "next step:" in result.stderr


def test_other_files_go_on_and_decide_the_exit_code(tmp_path: Path) -> None:
    lost = tmp_path / "nowhere.yaml"
    good = invoke(lost, written(tmp_path, CLEAN), "--format", "json")
    assert good.exit_code == 0
    assert "nowhere.yaml" in good.stderr
    document = strict(good.stdout)
    assert [record["verdict"] for record in document["records"]] == ["consistent"]
    assert document["unread_files"][0]["file"] == str(lost)
    off = CLEAN | {"values": [[9.8, 0, 0], [0, 9.8, 0], [0, 0, 98]]}
    assert invoke(lost, written(tmp_path, off)).exit_code == 1


def test_a_usage_error_exits_with_2(tmp_path: Path) -> None:
    assert invoke().exit_code == 2
    assert invoke(written(tmp_path, CLEAN), "--noise", "2").exit_code == 2


def test_whole_numbers_are_not_taken_for_zero(tmp_path: Path) -> None:
    ones = CLEAN | {"values": [[1, 0, 0], [0, 1, 0], [0, 0, 1]]}
    zeros = CLEAN | {"id": "b", "values": [[0, 0, 0], [0, 0, 0], [0, 0, 0]]}
    first, second = strict(invoke(written(tmp_path, ones, zeros), "--format", "json").stdout)["records"]
    assert (first["verdict"], second["verdict"]) == ("consistent", "cannot-tell")


def test_the_record_lists_what_symmetry_cannot_tell(demo: dict[str, Any]) -> None:
    records = by_id(demo)
    turn, hand = records["quartz-d"]["cannot_tell"]
    assert (turn["sort"], turn["flips"], turn["mixes"]) == ("axes", ["22"], False)
    assert turn["reading"] == "axes turned by 180 degrees about [001]"
    assert (hand["sort"], hand["flips"]) == ("hand", ["14", "22"])
    assert {one["sort"] for one in records["spinel-c"]["cannot_tell"]} == {"factor"}
    assert records["oxide-e"]["cannot_tell"] == []


def test_exit_is_1_when_one_of_many_violates(tmp_path: Path) -> None:
    off = CLEAN | {"id": "b", "values": [[9.8, 0, 0], [0, 9.8, 0], [0, 0, 98]]}
    assert invoke(written(tmp_path, CLEAN, off)).exit_code == 1
    assert invoke(written(tmp_path, CLEAN)).exit_code == 0


def test_csv_has_one_row_a_record_with_the_same_verdicts(demo: dict[str, Any]) -> None:
    rows = list(csv.DictReader(io.StringIO(invoke(DEMO, COMPONENTS, "--format", "csv").output)))
    assert [(row["id"], row["verdict"]) for row in rows] == [
        (record["id"], record["verdict"]) for record in demo["records"]
    ]
    assert {row["id"]: row["best_slip"] for row in rows}["oxide-e"].startswith("sign ")


@pytest.mark.parametrize("format_name", ["markdown", "latex"])
def test_tables_name_every_record(format_name: str, demo: dict[str, Any]) -> None:
    text = invoke(DEMO, COMPONENTS, "--format", format_name).output
    assert all(record["id"] in text for record in demo["records"])


def test_projecting_writes_before_after_and_difference_beside_the_report(tmp_path: Path) -> None:
    target = tmp_path / "nearest.json"
    bent = CLEAN | {"values": [[9.8, 0.01, 0], [0.01, 9.8, 0], [0, 0, 9.86]], "sigma": 0.05}
    result = invoke(written(tmp_path, bent, {"id": "b"}), "--project", target)
    assert result.exit_code == 0
    first, second = strict(target.read_text(encoding="utf-8"))["records"]
    (value,) = first["independent"]
    assert value["value"] == pytest.approx((9.8 + 9.8 + 9.86) / 3)
    assert value["uncertainty"] == pytest.approx(0.05 / 3**0.5)
    assert first["before"] == bent["values"]
    assert first["difference"][0][1] == pytest.approx(0.01)
    assert second["problem"]


def test_the_crystal_option_serves_records_without_one(tmp_path: Path) -> None:
    bare = {name: value for name, value in CLEAN.items() if name != "crystal"}
    path = written(tmp_path, bare)
    assert invoke(path).exit_code == 3
    result = invoke(path, "--crystal", STRUCTURES / "rocksalt_NaCl.cif", "--format", "json")
    (record,) = strict(result.output)["records"]
    assert (record["group"], record["crystal"]["formula"]) == ("m-3m", "NaCl")


#: Two data blocks; iron of two charges in a cube, which is body-centred unless the charges count.
BLOCK = """data_{name}
_cell_length_a {edge}
_cell_length_b {edge}
_cell_length_c {edge}
_cell_angle_alpha 90
_cell_angle_beta 90
_cell_angle_gamma 90
_space_group_name_H-M_alt 'P m -3 m'
loop_
_atom_site_label
_atom_site_type_symbol
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
Fe1 Fe2+ 0 0 0
Fe2 Fe3+ 0.5 0.5 0.5
"""


def test_options_of_reading_choose_in_the_files_that_records_name(tmp_path: Path) -> None:
    blocks = [BLOCK.format(name="small", edge=2.8), BLOCK.format(name="large", edge=2.9)]
    (tmp_path / "two.cif").write_text("".join(blocks), encoding="utf-8")
    vasp = str(STRUCTURES / "zincblende_GaAs.vasp")
    path = written(tmp_path, CLEAN | {"crystal": "two.cif"}, CLEAN | {"id": "b", "crystal": vasp})
    asked = ("--block", "large", "--distinguish", "oxidation", "--symmetry-from", "hm")
    document = strict(invoke(path, *asked, "--format", "json").stdout)
    assert [record["error"] for record in document["records"]] == [None, None]
    iron, gallium = (record["crystal"] for record in document["records"])
    assert (iron["space_group"], gallium["space_group"]) == ("Pm-3m", "F-43m")
    assert iron["part"].startswith("data block large")
    assert iron["distinguished_by"] == ["element", "occupancy", "oxidation"]
    assert document["reading"] == {
        "frame": None,
        "block": "large",
        "symmetry_from": "hm",
        "distinguish": ["oxidation"],
    }
    plain = invoke(path, "--frame", "1", "--format", "json")
    assert strict(plain.stdout)["records"][0]["crystal"]["space_group"] == "Im-3m"


def test_several_structures_in_a_file_are_an_error_of_the_record(tmp_path: Path) -> None:
    blocks = [BLOCK.format(name="small", edge=2.8), BLOCK.format(name="large", edge=2.9)]
    (tmp_path / "two.cif").write_text("".join(blocks), encoding="utf-8")
    result = invoke(written(tmp_path, CLEAN, CLEAN | {"id": "b", "crystal": "two.cif"}))
    assert result.exit_code == 0
    assert "data block small; data block large" in " ".join(result.output.split())
    inline = CLEAN | {"crystal": "".join(blocks)}
    chosen = invoke(written(tmp_path, inline), "--block", "small", "--format", "json")
    assert strict(chosen.stdout)["records"][0]["crystal"]["part"].startswith("data block small")


def test_a_choice_that_means_nothing_in_any_file_is_a_usage_error(tmp_path: Path) -> None:
    result = invoke(written(tmp_path, CLEAN), "--distinguish", "colour")
    assert result.exit_code == 2
    assert "isotope, oxidation, label, moment" in result.stderr


def test_the_tolerance_decides_about_the_crystal_and_stands_in_the_document(tmp_path: Path) -> None:
    path = written(tmp_path, CLEAN | {"crystal": str(STRUCTURES / "barium_titanate_BaTiO3.vasp")})
    tight, wide = (
        strict(invoke(path, "--tolerance", value, "--format", "json").output) for value in ("0.01", "0.2")
    )
    assert [document["tolerance_angstrom"] for document in (tight, wide)] == [0.01, 0.2]
    assert [document["records"][0]["group"] for document in (tight, wide)] == ["4mm", "m-3m"]
