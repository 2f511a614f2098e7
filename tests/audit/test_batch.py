"""Many records at once: order, errors that end nothing, readings, stability, cross-checks between records."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import sitesym
from sitesym.audit import CrystalShelf, Measurement, audit_files, batch
from sitesym.audit.batch import AuditRun
from sitesym.errors import SitesymError, TensorInputError, UsageError
from sitesym.tensors import kind, to_full, to_matrix, turned

STRUCTURES = Path(__file__).parents[2] / "structures"
ORDER = "11 22 33 23 13 12"
#: Class 32 in its standard axes; the numbers are invented.
D_32 = np.array([[2.1, -2.1, 0, -0.6, 0, 0], [0, 0, 0, 0, 0.6, -4.2], [0, 0, 0, 0, 0, 0]])
C_CUBIC = np.diag([120.0] * 3 + [60.0] * 3) + np.pad(50.0 * (1 - np.eye(3)), (0, 3))


def record(**fields: Any) -> dict[str, Any]:
    return {
        "id": "q",
        "crystal": "32",
        "quantity": "piezoelectric-strain",
        "unit": "pC/N",
        "order": ORDER,
        "axes": "ieee",
        "values": D_32.tolist(),
    } | fields


def run(folder: Path, *records: dict[str, Any], **options: Any) -> AuditRun:
    path = folder / "records.json"
    path.write_text(json.dumps(list(records)), encoding="utf-8")
    return audit_files([path], CrystalShelf(), **({"noise": 0.01} | options))


def verdicts(audited: AuditRun) -> list[str | None]:
    return [one.result.verdict if one.result is not None else None for one in audited.records]


def test_records_keep_their_order_and_errors_stand_in_their_places(tmp_path: Path) -> None:
    flipped = D_32.copy()
    flipped[0, 1] *= -1
    audited = run(
        tmp_path,
        record(id="good"),
        record(id="no crystal", crystal=None),
        record(id="lost crystal", crystal="nowhere.cif"),
        record(id="bad number", values=[[None] * 6] * 3),
        record(id="slip", values=flipped.tolist()),
    )
    assert [one.record.id for one in audited.records] == [
        "good",
        "no crystal",
        "lost crystal",
        "bad number",
        "slip",
    ]
    assert verdicts(audited) == ["consistent", None, None, None, "violates"]
    errors = [one.error for one in audited.records if one.error is not None]
    assert all(isinstance(error, SitesymError) and error.next_step for error in errors)
    assert all("records.json, record" in error.file for error in errors)


def test_numbers_the_linear_algebra_fails_on_end_their_record_and_not_the_run(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    original = batch.audit

    def failing(measurement: Measurement, *rest: Any) -> Any:
        return np.linalg.inv(np.zeros((2, 2))) if measurement.id == "b" else original(measurement, *rest)

    monkeypatch.setattr(batch, "audit", failing)
    audited = run(tmp_path, record(id="a"), record(id="b"), record(id="c"))
    assert verdicts(audited) == ["consistent", None, "consistent"]
    assert "Singular matrix" in str(audited.records[1].error)


def test_entries_of_any_size_end_in_a_verdict_or_an_error(tmp_path: Path) -> None:
    sizes = (1e99, 1e-99, 5e-324, 1e100)
    extreme = [record(id=f"{size}", values=(D_32 * size).tolist()) for size in sizes]
    mixed = D_32.copy()
    mixed[0, 0], mixed[1, 5] = 1e100, 1e-300
    audited = run(tmp_path, *extreme, record(id="mixed", values=mixed.tolist()))
    assert all(one.result is not None or one.error is not None for one in audited.records)
    assert verdicts(audited)[:2] == ["consistent"] * 2


def test_a_file_that_cannot_be_read_stands_aside_and_the_others_go_on(tmp_path: Path) -> None:
    path = tmp_path / "records.json"
    path.write_text(json.dumps([record()]), encoding="utf-8")
    audited = audit_files([tmp_path / "nowhere.json", path], CrystalShelf(), 0.01)
    assert verdicts(audited) == ["consistent"]
    assert [Path(error.file).name for error in audited.unread] == ["nowhere.json"]


def test_a_noise_that_is_no_fraction_is_refused_as_a_whole(tmp_path: Path) -> None:
    with pytest.raises(UsageError, match="noise"):
        run(tmp_path, record(), noise=1.5)


def test_a_crystal_given_beside_serves_records_that_name_none_and_no_other(tmp_path: Path) -> None:
    audited = run(tmp_path, record(crystal=None), record(), crystal="m-3m")
    assert [one.result.group.symbol for one in audited.records if one.result is not None] == ["m-3m", "32"]


def test_the_tensor_turned_with_its_axes_is_read_back_in_the_axes_of_the_file(tmp_path: Path) -> None:
    quarter = [[0, 1, 0], [-1, 0, 0], [0, 0, 1]]
    audited = run(tmp_path, record(axes=quarter, crystal=str(STRUCTURES / "quartz_SiO2.cif")))
    (one,) = audited.records
    assert one.result is not None
    assert one.read is not None
    assert one.result.verdict == "consistent-otherwise"
    # Components that the read matrix and the group in its axes allow are the same ones.
    projection = one.projected()
    assert projection is not None
    assert projection.relative_change == pytest.approx(0.0, abs=1e-9)


def test_a_mis_ordered_array_is_read_in_the_order_found(tmp_path: Path) -> None:
    # 4mm: columns in the order 11 22 33 12 13 23, stated as 23 13 12.
    values = np.array([[0, 0, 0, 0, 3.2, 0], [0, 0, 0, 0, 0, 3.2], [-0.3, -0.3, 1.1, 0, 0, 0]])
    (one,) = run(
        tmp_path, record(crystal="4mm", quantity="piezoelectric-stress", values=values.tolist())
    ).records
    assert one.result is not None
    assert one.result.verdict == "consistent-otherwise"
    assert one.read is not None
    assert np.flatnonzero(one.read.matrix[0]).tolist() == [4]
    assert np.flatnonzero(one.read.matrix[1]).tolist() == [3]


def test_elastic_records_and_only_they_have_a_stability(tmp_path: Path) -> None:
    elastic = record(quantity="elastic-stiffness", crystal="m-3m", unit="GPa", values=C_CUBIC.tolist())
    stable, other = run(tmp_path, elastic, record()).records
    assert stable.stability is not None
    assert stable.stability.answer == "stable"
    assert other.stability is None


def elastic_pair(**fields: Any) -> list[dict[str, Any]]:
    compliance = np.linalg.inv(C_CUBIC) * 1000.0
    c = record(id="c", quantity="elastic-stiffness", unit="GPa", values=C_CUBIC.tolist())
    s = record(id="s", quantity="elastic-compliance", unit="1/TPa", values=compliance.round(3).tolist())
    return [one | {"crystal": "zb.cif", "axes": "file"} | fields for one in (c, s)]


@pytest.fixture
def zincblende(tmp_path: Path) -> Path:
    text = (STRUCTURES / "zincblende_GaAs.cif").read_text(encoding="utf-8")
    (tmp_path / "zb.cif").write_text(text, encoding="utf-8")
    return tmp_path


def test_records_of_one_structure_are_checked_against_each_other_in_si_units(zincblende: Path) -> None:
    (check,) = run(zincblende, *elastic_pair()).cross_checks
    assert (check.relation, check.ids, check.holds) == ("s = 1/c", ("s", "c"), True)
    assert check.left[3, 3] == pytest.approx(1.0 / 60e9, rel=1e-3)


def test_a_wrong_unit_is_found_by_the_check_although_each_tensor_alone_is_fine(zincblende: Path) -> None:
    c, s = elastic_pair()
    audited = run(zincblende, c | {"unit": "kbar"}, s)
    assert verdicts(audited) == ["consistent", "consistent"]
    assert [check.holds for check in audited.cross_checks] == [False]


def test_records_under_one_symbol_belong_together_only_when_they_name_their_sample(tmp_path: Path) -> None:
    assert run(tmp_path, *elastic_pair(crystal="-43m")).cross_checks == ()
    assert len(run(tmp_path, *elastic_pair(crystal="-43m", sample="rod 1")).cross_checks) == 1


def test_a_tensor_in_an_unknown_unit_enters_no_check(zincblende: Path) -> None:
    c, s = elastic_pair()
    assert run(zincblende, c | {"unit": "unknown"}, s).cross_checks == ()


def test_records_in_different_stated_axes_are_compared_in_common_ones(zincblende: Path) -> None:
    eighth = [[0.5**0.5, 0.5**0.5, 0], [-(0.5**0.5), 0.5**0.5, 0], [0, 0, 1]]
    c, s = elastic_pair()
    compliance = kind("elastic-compliance")
    moved = to_matrix(compliance, turned(to_full(compliance, np.array(s["values"])), np.array(eighth)))
    (check,) = run(zincblende, c, s | {"axes": eighth, "values": moved.tolist()}).cross_checks
    assert check.holds
    assert check.relative < 1e-3


def test_without_explanations_a_failure_stays_a_violation(tmp_path: Path) -> None:
    turned_by_30 = [[0, 0, 0, -0.6, 0, -4.2], [-2.1, 2.1, 0, 0, 0.6, 0], [0] * 6]
    assert verdicts(run(tmp_path, record(values=turned_by_30))) == ["consistent-otherwise"]
    assert verdicts(run(tmp_path, record(values=turned_by_30), explain=False)) == ["violates"]


def test_the_package_itself_answers_a_call(tmp_path: Path) -> None:
    answers = [
        sitesym.audit(D_32, crystal, "piezoelectric-strain", axes="ieee", order=ORDER, unit="pC/N")
        for crystal in ("32", sitesym.PointGroup.from_symbol("32"), STRUCTURES / "quartz_SiO2.cif")
    ]
    assert {answer.verdict for answer in answers} == {"consistent"}
    measurement = Measurement("q", kind("piezoelectric-strain"), D_32, axes="ieee")
    assert sitesym.audit(measurement, "32").verdict == "consistent"


def test_a_call_that_does_not_say_enough_is_refused() -> None:
    with pytest.raises(UsageError, match="does not say what it measures"):
        sitesym.audit(D_32, "32")
    with pytest.raises(TensorInputError, match="order"):
        sitesym.audit(D_32, "32", "piezoelectric-strain", order="1 2 3 4 5 6")
    with pytest.raises(TensorInputError, match="point-group symbol"):
        sitesym.audit(D_32, "no such crystal", "piezoelectric-strain")


def test_a_tensor_that_some_turn_leaves_unchanged_is_searched_like_any_other() -> None:
    # All entries alike: symmetric about [111], where a free rotation has nothing to change.
    answer = sitesym.audit(np.ones((3, 6)), "32", "piezoelectric-strain", axes="ieee", order=ORDER, sigma=0.1)
    assert answer.verdict == "violates"
