"""Files of measurements: every format to the same measurement, and what is not understood to its error."""

from __future__ import annotations

import csv
import io
import json
from pathlib import Path

import numpy as np
import pytest

from sitesym.audit.crystal_references import CrystalReference, CrystalShelf
from sitesym.audit.orders import STANDARD_ORDER
from sitesym.audit.printed import PrintedNumber, rounding_steps
from sitesym.audit.records import Record, records_of_file
from sitesym.crystals import CrystalSymmetry
from sitesym.errors import ReadingError, SitesymError, TensorInputError
from sitesym.groups import PointGroup

GAAS = """GaAs
1.0
0.0 2.8266 2.8266
2.8266 0.0 2.8266
2.8266 2.8266 0.0
Ga As
1 1
Direct
0.0 0.0 0.0
0.25 0.25 0.25
"""
#: GaAs, C/m^2: G. Arlt, P. Quadflieg, Phys. Status Solidi 25 (1968) 323; from memory.
E_GAAS = [[0, 0, 0, -0.16, 0, 0], [0, 0, 0, 0, -0.16, 0], [0, 0, 0, 0, 0, -0.16]]
RECORD = {
    "id": "a1",
    "crystal": GAAS,
    "quantity": "piezoelectric-stress",
    "unit": "C/m^2",
    "order": "11 22 33 23 13 12",
    "axes": "file",
    "values": E_GAAS,
    "source": "invented",
}


def written(folder: Path, name: str, text: str) -> list[Record]:
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return list(records_of_file(path))


def only(folder: Path, name: str, text: str) -> Record:
    (record,) = written(folder, name, text)
    return record


def error_of(folder: Path, fields: dict[str, object]) -> SitesymError:
    record = only(folder, "a.json", json.dumps(fields))
    assert record.error is not None
    assert record.measurement is None
    return record.error


def csv_of(head: list[str], rows: list[list[object]]) -> str:
    stream = io.StringIO()
    writer = csv.writer(stream)
    writer.writerow(head)
    writer.writerows(rows)
    return stream.getvalue()


def formats() -> dict[str, str]:
    matrix = {name: json.dumps(value) if name == "values" else value for name, value in RECORD.items()}
    plain = {name: value for name, value in RECORD.items() if name != "values"}
    components = [
        [*plain.values(), f"e{i + 1}{j + 1}", value]
        for i, row in enumerate(E_GAAS)
        for j, value in enumerate(row)
    ]
    return {
        "one.json": json.dumps(RECORD),
        "list.json": json.dumps([RECORD], indent=2),
        "wrapped.json": json.dumps({"records": [RECORD]}),
        "lines.jsonl": json.dumps(RECORD) + "\n\n",
        "lines.json": json.dumps(RECORD) + "\n",
        "matrix.csv": csv_of(list(matrix), [list(matrix.values())]),
        "commented.csv": "# invented\n" + csv_of(list(matrix), [list(matrix.values())]),
        "components.csv": csv_of([*plain, "component", "value"], components),
        "a.yaml": json.dumps([RECORD]),
        "b.yml": "---\n" + json.dumps(RECORD),
        "no-suffix": json.dumps(RECORD),
    }


@pytest.mark.parametrize("name", formats())
def test_every_format_gives_the_same_measurement(tmp_path: Path, name: str) -> None:
    record = only(tmp_path, name, formats()[name])
    assert record.error is None
    measurement = record.measurement
    assert measurement is not None
    assert measurement.values.tolist() == np.array(E_GAAS, dtype=float).tolist()
    assert np.asarray(measurement.rounding).tolist() == np.full((3, 6), 0.01).tolist()
    assert (measurement.id, measurement.kind.name, measurement.unit, measurement.axes, measurement.order) == (
        "a1",
        "piezoelectric-stress",
        "C/m^2",
        "file",
        STANDARD_ORDER,
    )
    assert record.crystal is not None
    host = CrystalShelf().host(record.crystal)
    assert isinstance(host, CrystalSymmetry)
    assert host.point_group.symbol == "-43m"


def test_what_a_record_does_not_say_is_unknown(tmp_path: Path) -> None:
    fields = {name: RECORD[name] for name in ("id", "crystal", "quantity", "values")}
    measurement = only(tmp_path, "a.json", json.dumps(fields)).measurement
    assert measurement is not None
    assert (measurement.order, measurement.axes, measurement.unit) == (None, "unknown", "unknown")
    assert measurement.sigma is None


def test_an_order_is_not_missed_where_there_is_none_to_state(tmp_path: Path) -> None:
    fields = {"quantity": "permittivity", "crystal": "m-3m", "values": np.eye(3).tolist()}
    measurement = only(tmp_path, "a.json", json.dumps(fields)).measurement
    assert measurement is not None
    assert measurement.order == STANDARD_ORDER


def test_axes_may_be_a_rounded_matrix_and_sigma_a_number(tmp_path: Path) -> None:
    turned = RECORD | {"axes": [[0.7071, 0.7071, 0], [-0.7071, 0.7071, 0], [0, 0, 1]], "sigma": 0.01}
    measurement = only(tmp_path, "a.json", json.dumps(turned)).measurement
    assert measurement is not None
    axes = np.asarray(measurement.axes)
    assert axes @ axes.T == pytest.approx(np.eye(3), abs=1e-14)
    assert measurement.sigma == 0.01


def test_fields_that_are_not_known_stay_as_remarks(tmp_path: Path) -> None:
    record = only(tmp_path, "a.json", json.dumps(RECORD | {"laboratory": "invented", "run": 7}))
    assert record.remarks == ("fields not used: laboratory invented; run 7",)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"values": [[0, 0, 0, None, 0, 0], *E_GAAS[1:]]}, "entry (1, 4) null"),
        ({"values": [[0, 0, 0, "x", 0, 0], *E_GAAS[1:]]}, "entry (1, 4) 'x'"),
        ({"values": [[0, 0, 0, True, 0, 0], *E_GAAS[1:]]}, "entry (1, 4) True"),
        ({"values": [[0, 0, 0, float("nan"), 0, 0], *E_GAAS[1:]]}, "entry (1, 4)"),
        ({"values": [[0, 0, 0], *E_GAAS[1:]]}, "not alike"),
        ({"values": [[0, 0, 0, 1e200, 0, 0], *E_GAAS[1:]]}, "1e+200"),
        ({"values": [[1, 2], [3, 4]]}, "shape"),
        ({"values": []}, "shape"),
        ({"values": None}, "no values"),
        ({"quantity": "piezo"}, "piezo"),
        ({"quantity": None}, "does not say its quantity"),
        ({"order": "11 22 33 44 55 66"}, "order"),
        ({"axes": "sideways"}, "axes"),
        ({"axes": [[1, 0, 0], [0, 1, 0], [0, 0, -1]]}, "right-handed"),
        ({"axes": [[1, 0], [0, 1]]}, "right-handed"),
        ({"layout": "diagonal"}, "layout"),
        ({"sigma": -1}, "sigma"),
        ({"unit": ["GPa"]}, "field unit is not a text"),
        ({"id": {"a": 1}}, "field id is not a text"),
    ],
)
def test_a_record_that_is_not_understood_says_what_and_what_to_do(
    tmp_path: Path, change: dict[str, object], message: str
) -> None:
    error = error_of(tmp_path, RECORD | change)
    assert message in str(error)
    assert error.rule
    assert error.next_step
    assert "a.json" in error.file


def test_a_broken_line_does_not_end_the_file(tmp_path: Path) -> None:
    good = json.dumps(RECORD)
    records = written(tmp_path, "a.jsonl", f'{good}\n{{"id": "b",\n[1, 2]\n{good}\n')
    assert [record.error is None for record in records] == [True, False, False, True]
    assert "line 2" in records[1].place
    assert "not a set of named fields" in str(records[2].error)


@pytest.mark.parametrize(
    ("name", "text", "message"),
    [
        ("a.json", "", "empty"),
        ("a.json", "[]", "no record"),
        ("a.json", "{", "not JSON"),
        ("a.json", "[" * 100_000, "nested"),
        ("a.yaml", "a: [1", "not YAML"),
        ("a.yaml", "# nothing", "no record"),
        ("a.csv", "name,number\na,1\n", "columns"),
        ("a.csv", "id,values\n", "no record"),
        ("a.dat", "1 2 3", "format"),
    ],
)
def test_a_file_that_cannot_be_read_is_refused_by_name(
    tmp_path: Path, name: str, text: str, message: str
) -> None:
    with pytest.raises(SitesymError, match=message) as caught:
        written(tmp_path, name, text)
    assert caught.value.file == str(tmp_path / name)
    assert caught.value.next_step


def test_a_missing_file_a_folder_and_bytes_that_are_no_text_are_refused(tmp_path: Path) -> None:
    (tmp_path / "latin.json").write_bytes(b'{"id": "\xe5"}')
    faults = {"nowhere.json": "cannot be read", ".": "cannot be read", "latin.json": "UTF-8"}
    for path, message in faults.items():
        with pytest.raises(TensorInputError, match=message):
            list(records_of_file(tmp_path / path))


def test_components_that_are_not_listed_are_not_taken_for_zero(tmp_path: Path) -> None:
    head, rows = ["id", "quantity", "component", "value"], [["a", "elastic-stiffness", "c11", 165.6]]
    error = only(tmp_path, "a.csv", csv_of(head, rows)).error
    assert "35 components" in str(error)


def test_one_triangle_of_a_symmetric_matrix_is_enough_and_keeps_its_sigmas(tmp_path: Path) -> None:
    rows = [
        ["a", "permittivity", f"{i}{j}", 4.5 if i == j else 0, 0.1] for i in range(1, 4) for j in range(i, 4)
    ]
    record = only(tmp_path, "a.csv", csv_of(["id", "quantity", "component", "value", "sigma"], rows))
    assert record.measurement is not None
    assert record.measurement.values.tolist() == (4.5 * np.eye(3)).tolist()
    assert np.asarray(record.measurement.sigma).tolist() == np.full((3, 3), 0.1).tolist()


def test_components_of_two_quantities_under_one_id_are_two_records(tmp_path: Path) -> None:
    names = ("pyroelectric", "spontaneous-polarisation")
    rows: list[list[object]] = [["q", name, i, 1.0] for name in names for i in (1, 2, 3)]
    records = written(tmp_path, "a.csv", csv_of(["id", "quantity", "component", "value"], rows))
    assert [record.quantity for record in records] == list(names)
    assert all(record.error is None for record in records)


def test_a_component_listed_twice_or_outside_the_array_is_an_error(tmp_path: Path) -> None:
    head = ["id", "quantity", "component", "value"]
    rows: list[list[object]] = [["a", "pyroelectric", i, 1.0] for i in (1, 2, 3)]
    twice = only(tmp_path, "a.csv", csv_of(head, [*rows, ["a", "pyroelectric", 3, 2.0]]))
    outside = only(tmp_path, "b.csv", csv_of(head, [*rows, ["a", "pyroelectric", 4, 2.0]]))
    assert "more than once" in str(twice.error)
    assert "'4'" in str(outside.error)


@pytest.mark.parametrize(
    ("texts", "steps"),
    [
        (["390", "145", "123"], [1, 1, 1]),
        (["86.74", "6.99", "107.2"], [0.01, 0.01, 0.1]),
        (["0.1234", "0.25", "0", "0.0"], [1e-4, 1e-4, 1e-4, 1e-4]),
        (["1.23e-3", "45.6"], [1e-5, 0.1]),
        (["2.5E+02", "1.25E+02"], [1, 1]),
        (["0", "0.0"], [0.1, 0.1]),
        (["-0.6559", "0.0"], [1e-4, 1e-4]),
    ],
)
def test_printed_digits_tell_the_step_of_rounding(texts: list[str], steps: list[float]) -> None:
    assert rounding_steps(texts) == pytest.approx(steps)


def test_a_printed_number_is_a_float_that_survives_copying() -> None:
    number = PrintedNumber(" 1.50 ")
    copied = number.__reduce__()
    assert (float(number), number.text, copied) == (1.5, "1.50", (PrintedNumber, ("1.50",)))


def test_a_crystal_may_be_a_path_beside_the_records_a_symbol_or_a_text(tmp_path: Path) -> None:
    (tmp_path / "gaas.vasp").write_text(GAAS, encoding="utf-8")
    shelf = CrystalShelf()
    by_path = shelf.host(CrystalReference("gaas.vasp", str(tmp_path)))
    by_symbol = shelf.host(CrystalReference("-4m2"))
    assert isinstance(by_path, CrystalSymmetry)
    assert isinstance(by_symbol, PointGroup)
    assert (by_path.crystal.formula, by_symbol.oriented) == ("GaAs", "-4m2")


def test_a_crystal_is_read_once_however_many_records_name_it(tmp_path: Path) -> None:
    path = tmp_path / "gaas.vasp"
    path.write_text(GAAS, encoding="utf-8")
    shelf = CrystalShelf()
    first = shelf.host(CrystalReference("gaas.vasp", str(tmp_path)))
    path.unlink()
    assert shelf.host(CrystalReference("gaas.vasp", str(tmp_path))) is first


def test_a_crystal_that_is_nothing_of_the_three_is_an_error_every_time() -> None:
    shelf = CrystalShelf()
    for text in ("no-such-file.cif", "no-such-file.cif", "x" * 5000, "a\0b", ".."):
        with pytest.raises(TensorInputError, match="point-group symbol"):
            shelf.host(CrystalReference(text))


def test_the_error_of_a_structure_text_names_no_file_of_the_system() -> None:
    broken = GAAS.replace("0.25 0.25 0.25", "nan 0.25 0.25")
    with pytest.raises(ReadingError) as caught:
        CrystalShelf().host(CrystalReference(broken))
    assert "tmp" not in str(caught.value)
