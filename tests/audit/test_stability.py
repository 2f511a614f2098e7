"""Elastic stability: conditions derived from irreps against eigenvalues, averages, and the three answers."""

from __future__ import annotations

import re
from collections.abc import Mapping

import numpy as np
import pytest

from sitesym.arrays import FloatArray
from sitesym.audit.stability import Stability, elastic_stability
from sitesym.audit.strain_blocks import strain_blocks
from sitesym.errors import TensorInputError
from sitesym.groups import PointGroup, standard_rotation
from sitesym.tensors import allowed_form, kind, to_full, to_matrix, turned

CLASSES = [
    *("1", "-1", "2", "m", "2/m", "222", "mm2", "mmm"),
    *("4", "-4", "4/m", "422", "4mm", "-42m", "4/mmm", "3", "-3", "32", "3m", "-3m"),
    *("6", "-6", "6/m", "622", "6mm", "-6m2", "6/mmm", "23", "m-3", "432", "-43m", "m-3m"),
]
STIFFNESS, COMPLIANCE = kind("elastic-stiffness"), kind("elastic-compliance")
KELVIN = np.array([1.0, 1.0, 1.0, *[2.0**0.5] * 3])


def standard(symbol: str) -> PointGroup:
    group = PointGroup.from_symbol(symbol)
    return group.rotated(standard_rotation(group))


def random_stiffness(group: PointGroup, rng: np.random.Generator, shift: float) -> FloatArray:
    """Allowed stiffness with independent values about an isotropic solid; a small shift makes it unstable."""
    form = allowed_form(STIFFNESS, group)
    values = {name: rng.normal() + shift * (name[0] == name[1]) for name in form.independent}
    return form.matrix(values)


def statement_holds(text: str, matrix: FloatArray) -> bool:
    """A condition evaluated from its text alone, with c11, c12, ... read from the matrix."""

    def number(match: re.Match[str]) -> str:
        return repr(float(matrix[int(match[1]) - 1, int(match[2]) - 1]))

    left = text.removesuffix(" > 0")
    if left.startswith("det"):
        rows = left.removeprefix("det [").removesuffix("]").split("; ")
        entries = [[float(re.sub(r"c(\d)(\d)", number, cell)) for cell in row.split(", ")] for row in rows]
        return bool(np.linalg.det(entries) > 0.0)
    python = re.sub(r"(?<=[\w)]) (?=[(c])", "*", left).replace("^", "**")
    return bool(eval(re.sub(r"c(\d)(\d)", lambda m: f"({number(m)})", python)) > 0.0)


@pytest.mark.parametrize("symbol", CLASSES)
def test_the_conditions_as_printed_hold_exactly_when_all_eigenvalues_are_positive(symbol: str) -> None:
    group, rng = standard(symbol), np.random.default_rng(32)
    texts = [condition.text for block in strain_blocks(group) for condition in block.conditions]
    answers = []
    for trial in range(40):
        matrix = random_stiffness(group, rng, shift=3.0 if trial % 2 else 1.0)
        positive = bool(np.linalg.eigvalsh(matrix * np.outer(KELVIN, KELVIN)).min() > 0.0)
        assert all(statement_holds(text, matrix) for text in texts) == positive
        answers.append(positive)
    assert any(answers)
    assert not all(answers)


@pytest.mark.parametrize("symbol", CLASSES)
def test_eigenvalues_of_the_blocks_with_their_dimensions_are_those_of_the_whole(symbol: str) -> None:
    rng = np.random.default_rng(5)
    turn, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    turn *= np.sign(np.linalg.det(turn))
    group = standard(symbol)
    matrix = random_stiffness(group, rng, shift=4.0)
    turned_matrix = to_matrix(STIFFNESS, turned(to_full(STIFFNESS, matrix), turn))
    stability = elastic_stability(STIFFNESS, turned_matrix, group.rotated(turn))
    together = [value for b in stability.blocks for value in b.eigenvalues for _ in range(b.dimension)]
    assert np.sort(together) == pytest.approx(stability.eigenvalues, abs=1e-9)
    assert stability.eigenvalues == pytest.approx(
        np.linalg.eigvalsh(matrix * np.outer(KELVIN, KELVIN)), abs=1e-9
    )


def texts_of(symbol: str) -> set[str]:
    return {condition.text for block in strain_blocks(standard(symbol)) for condition in block.conditions}


def test_conditions_of_cubic_hexagonal_and_trigonal_classes_are_the_published_ones() -> None:
    # F. Mouhat, F.-X. Coudert, Phys. Rev. B 90 (2014) 224104, eqs. for each Laue class; from memory.
    assert texts_of("m-3m") == {"c11 + 2 c12 > 0", "c11 - c12 > 0", "c44 > 0"}
    hexagonal = {"c11 + c12 > 0", "(c11 + c12) c33 - 2 c13^2 > 0", "c11 - c12 > 0", "c44 > 0"}
    assert texts_of("6/mmm") == texts_of("6") == hexagonal
    assert "(c11 - c12) c44 - 2 c14^2 > 0" in texts_of("-3m")
    assert "(c11 - c12) c44 - 2 c14^2 - 2 c15^2 > 0" in texts_of("-3")
    assert "(c11 - c12) c66 - 2 c16^2 > 0" in texts_of("4/m")
    assert "det [c11, c12, c13; c12, c22, c23; c13, c23, c33] > 0" in texts_of("mmm")


@pytest.mark.parametrize("symbol", CLASSES)
def test_each_irrep_gives_as_many_conditions_as_it_is_contained_in_a_strain(symbol: str) -> None:
    blocks = strain_blocks(standard(symbol))
    assert sum(block.dimension * len(block.conditions) for block in blocks) == 6


def cubic(c11: float, c12: float, c44: float) -> FloatArray:
    form = allowed_form(STIFFNESS, standard("m-3m"))
    return form.matrix({"11": c11, "12": c12, "44": c44})


def cubic_stability(c11: float, c12: float, c44: float, noise: float = 0.0) -> Stability:
    return elastic_stability(STIFFNESS, cubic(c11, c12, c44), standard("m-3m"), noise)


def test_averages_of_a_cubic_crystal_follow_the_closed_forms_of_hill() -> None:
    # SrTiO3, GPa: J. B. Wachtman, M. L. Wheat, S. Marzullo, J. Res. NBS 67A (1963) 193.
    c11, c12, c44 = 315.6, 102.7, 121.5
    averages = cubic_stability(c11, c12, c44).averages
    assert averages is not None
    assert averages.bulk_voigt == pytest.approx((c11 + 2 * c12) / 3)
    assert averages.bulk_reuss == pytest.approx((c11 + 2 * c12) / 3)
    assert averages.shear_voigt == pytest.approx((c11 - c12 + 3 * c44) / 5)
    assert averages.shear_reuss == pytest.approx(5 * (c11 - c12) * c44 / (4 * c44 + 3 * (c11 - c12)))
    assert averages.bounds_hold
    assert averages.anisotropy > 0.0


def test_averages_of_calcite_reproduce_the_published_moduli() -> None:
    # C.-C. Chen et al., Am. Mineral. 86 (2001) 1525, GPa: Young's modulus Reuss 74.9, Voigt 97.0 (the text);
    # the components are from memory.
    values = {"11": 149.4, "12": 57.9, "13": 53.5, "14": -20.0, "33": 85.2, "44": 34.1}
    group = standard("-3m")
    stability = elastic_stability(STIFFNESS, allowed_form(STIFFNESS, group).matrix(values), group)
    averages = stability.averages
    assert averages is not None
    young = [
        9 * bulk * shear / (3 * bulk + shear)
        for bulk, shear in (
            (averages.bulk_reuss, averages.shear_reuss),
            (averages.bulk_voigt, averages.shear_voigt),
        )
    ]
    assert young == pytest.approx([74.9, 97.0], abs=0.15)
    assert stability.answer == "stable"


def test_an_isotropic_solid_has_no_anisotropy_and_equal_bounds() -> None:
    averages = cubic_stability(110.0, 50.0, 30.0).averages
    assert averages is not None
    assert averages.anisotropy == pytest.approx(0.0, abs=1e-9)
    assert averages.shear_voigt == pytest.approx(averages.shear_reuss)
    assert averages.poisson_hill == pytest.approx(50.0 / (110.0 + 50.0))


def test_a_negative_shear_constant_is_unstable_and_names_the_condition_that_fails() -> None:
    stability = cubic_stability(100.0, 120.0, 40.0)
    failing = [c.text for block in stability.blocks for c in block.conditions if not c.holds]
    assert stability.answer == "unstable"
    assert failing == ["c11 - c12 > 0"]


def test_an_eigenvalue_within_the_noise_of_zero_is_unreliable_not_stable() -> None:
    # Kelvin norm 207; three sigma of 2 % is 2.1, above the eigenvalue 1 of c11 - c12.
    assert cubic_stability(101.0, 100.0, 40.0).answer == "stable"
    noisy = cubic_stability(101.0, 100.0, 40.0, noise=0.02)
    assert noisy.answer == "unreliable"
    assert "the noise" in noisy.reasons[0]


def test_standard_deviations_of_entries_decide_where_they_are_given() -> None:
    sigma = np.full((6, 6), 0.01)
    sharp = elastic_stability(STIFFNESS, cubic(101.0, 100.0, 40.0), standard("m-3m"), sigma=sigma)
    blunt = elastic_stability(STIFFNESS, cubic(101.0, 100.0, 40.0), standard("m-3m"), sigma=100 * sigma)
    assert (sharp.answer, blunt.answer) == ("stable", "unreliable")
    assert blunt.margin == pytest.approx(100 * sharp.margin)


def test_triangles_that_differ_strongly_are_unreliable() -> None:
    matrix = cubic(300.0, 100.0, 100.0)
    matrix[0, 1] += 80.0
    matrix[2, 0] -= 80.0
    stability = elastic_stability(STIFFNESS, matrix, standard("m-3m"))
    assert stability.answer == "unreliable"
    assert "triangles" in stability.reasons[0]


def test_a_compliance_gives_the_answer_of_its_inverse() -> None:
    stiffness = cubic(315.6, 102.7, 121.5)
    of_stiffness = elastic_stability(STIFFNESS, stiffness, standard("m-3m"))
    of_compliance = elastic_stability(COMPLIANCE, np.linalg.inv(stiffness), standard("m-3m"))
    assert of_compliance.answer == of_stiffness.answer == "stable"
    assert np.sort(1.0 / of_compliance.eigenvalues) == pytest.approx(of_stiffness.eigenvalues)
    assert of_stiffness.averages is not None
    assert of_compliance.averages is not None
    assert of_compliance.averages.shear_hill == pytest.approx(of_stiffness.averages.shear_hill)
    values = [[c.value for b in s.blocks for c in b.conditions] for s in (of_stiffness, of_compliance)]
    assert values[0] == pytest.approx(values[1])


def test_a_stiffness_of_zeros_is_unreliable_and_has_no_averages() -> None:
    stability = elastic_stability(STIFFNESS, np.zeros((6, 6)), standard("m-3m"))
    assert stability.answer == "unreliable"
    assert stability.averages is None


def test_other_quantities_have_no_elastic_stability() -> None:
    with pytest.raises(TensorInputError, match="not elastic"):
        elastic_stability(kind("permittivity"), np.eye(3), standard("m-3m"))


def test_a_condition_value_is_the_minor_of_its_text() -> None:
    group = standard("-3m")
    values: Mapping[str, float] = {"11": 150.0, "12": 58.0, "13": 53.0, "14": -20.0, "33": 85.0, "44": 34.0}
    found = {c.text: c.value(values) for b in strain_blocks(group) for c in b.conditions}
    assert found["(c11 - c12) c44 - 2 c14^2 > 0"] == pytest.approx(92.0 * 34.0 - 2 * 400.0)
    assert found["(c11 + c12) c33 - 2 c13^2 > 0"] == pytest.approx(208.0 * 85.0 - 2 * 53.0**2)


def test_a_rotation_to_the_standard_orientation_that_is_known_gives_the_same_answer() -> None:
    rng = np.random.default_rng(6)
    turn, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    turn *= np.sign(np.linalg.det(turn))
    group = standard("-3m")
    matrix = random_stiffness(group, rng, shift=4.0)
    turned_matrix = to_matrix(STIFFNESS, turned(to_full(STIFFNESS, matrix), turn))
    known = elastic_stability(STIFFNESS, turned_matrix, group.rotated(turn), to_standard=turn.T)
    values = {c.text: c.value for block in known.blocks for c in block.conditions}
    assert values["c11 - c12 > 0"] == pytest.approx(matrix[0, 0] - matrix[0, 1])
    assert values["(c11 - c12) c44 - 2 c14^2 > 0"] == pytest.approx(
        (matrix[0, 0] - matrix[0, 1]) * matrix[3, 3] - 2 * matrix[0, 3] ** 2
    )
