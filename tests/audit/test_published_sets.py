"""Published sets of constants obey their class.

The relations here are typed from J. F. Nye, Physical Properties of Crystals (1957), tables 10, 11 and
appendix E, independent of the program. Stiffness GPa, compliance 1e-12/Pa, d pC/N, e C/m2, permittivity
relative to vacuum; axes IEEE Std 176-1978 except the first set. 'Memory' marks values quoted from memory.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from sitesym import PointGroup, kind
from sitesym.arrays import FloatArray
from sitesym.audit import Measurement, audit
from sitesym.groups import standard_rotation
from sitesym.tensors import to_full, to_matrix, turned


def symmetric(**entries: float) -> FloatArray:
    """6x6 matrix with entries such as m14 in both places."""
    matrix = np.zeros((6, 6))
    for name, value in entries.items():
        row, column = int(name[1]) - 1, int(name[2]) - 1
        matrix[row, column] = matrix[column, row] = value
    return matrix


def trigonal(
    m11: float, m12: float, m13: float, m14: float, m33: float, m44: float, m66: float, pair: float
) -> FloatArray:
    """Classes 32, 3m, -3m; ``pair`` is 1 for stiffness, 2 for compliance (s56 = 2 s14)."""
    return symmetric(
        m11=m11, m22=m11, m33=m33, m12=m12, m13=m13, m23=m13, m14=m14, m24=-m14, m56=pair * m14,
        m44=m44, m55=m44, m66=m66,
    )  # fmt: skip


def uniaxial(m11: float, m12: float, m13: float, m33: float, m44: float, m66: float) -> FloatArray:
    """Classes 4mm, 6mm and their supergroups."""
    return symmetric(
        m11=m11, m22=m11, m33=m33, m12=m12, m13=m13, m23=m13, m44=m44, m55=m44, m66=m66
    )  # fmt: skip


def cubic(m11: float, m12: float, m44: float) -> FloatArray:
    return uniaxial(m11, m12, m12, m11, m44, m44)


def piezo_32(p11: float, p14: float, factor: float) -> FloatArray:
    """``factor`` 2 for d, 1 for e."""
    return np.array([[p11, -p11, 0, p14, 0, 0], [0, 0, 0, 0, -p14, -factor * p11], [0] * 6], dtype=float)


def piezo_3m(p15: float, p22: float, p31: float, p33: float, factor: float) -> FloatArray:
    """Mirror perpendicular to x."""
    return np.array([[0, 0, 0, 0, p15, -factor * p22], [-p22, p22, 0, p15, 0, 0], [p31, p31, p33, 0, 0, 0]])


def piezo_4mm(p15: float, p31: float, p33: float) -> FloatArray:
    return piezo_3m(p15, 0.0, p31, p33, 1.0)


def piezo_cubic(p14: float) -> FloatArray:
    return np.array([[0, 0, 0, p14, 0, 0], [0, 0, 0, 0, p14, 0], [0, 0, 0, 0, 0, p14]])


C, S, D, E, EPS = (
    kind(name)
    for name in (
        "elastic-stiffness", "elastic-compliance", "piezoelectric-strain", "piezoelectric-stress",
        "permittivity",
    )
)  # fmt: skip
BECHMANN = "quartz, R. Bechmann, Phys. Rev. 110 (1958) 1060 (memory)"
WARNER = "A. W. Warner, M. Onoe, G. A. Coquin, J. Acoust. Soc. Am. 42 (1967) 1223"
BERLINCOURT = "BaTiO3, D. Berlincourt, H. Jaffe, Phys. Rev. 111 (1958) 143 (memory)"
QUARTZ_1949_E, QUARTZ_1978_E = piezo_32(0.171, -0.0406, 1.0), piezo_32(0.171, 0.0406, 1.0)
QUARTZ_1949_C = trigonal(86.74, 6.99, 11.91, -17.91, 107.2, 57.94, 39.88, 1)
QUARTZ_1978_C = trigonal(86.74, 6.99, 11.91, 17.91, 107.2, 57.94, 39.88, 1)

# source, class, kind, matrix, one unit of the last digit of the coarsest value printed.
PUBLISHED = [
    (BECHMANN + ", axes of IRE 1949", "32", C, QUARTZ_1949_C, 0.01),
    (BECHMANN + ", axes of IRE 1949", "32", S,
     trigonal(12.77, -1.79, -1.22, 4.5, 9.6, 20.04, 29.12, 2), 0.01),
    (BECHMANN + ", axes of IRE 1949", "32", D, piezo_32(2.31, 0.727, 2), 0.01),
    (BECHMANN + ", axes of IRE 1949", "32", E, QUARTZ_1949_E, 0.001),
    ("quartz, the same in the axes of IEEE 1978", "32", C, QUARTZ_1978_C, 0.01),
    ("quartz, the same in the axes of IEEE 1978", "32", E, QUARTZ_1978_E, 0.001),
    ("LiNbO3, " + WARNER, "3m", C, trigonal(203, 53, 75, 9, 245, 60, 75, 1), 1.0),
    ("LiNbO3, " + WARNER + " (memory)", "3m", S,
     trigonal(5.78, -1.01, -1.47, -1.02, 5.02, 17.0, 13.6, 2), 0.1),
    ("LiNbO3, " + WARNER, "3m", D, piezo_3m(68, 21, -1, 6, 2), 1.0),
    ("LiNbO3, " + WARNER + " (memory)", "3m", E, piezo_3m(3.7, 2.5, 0.2, 1.3, 1), 0.1),
    ("LiTaO3, " + WARNER + " (memory)", "3m", E, piezo_3m(2.6, 1.6, 0.0, 1.9, 1), 0.1),
    (BERLINCOURT, "4mm", C, uniaxial(275, 179, 152, 165, 54.4, 113), 1.0),
    (BERLINCOURT, "4mm", D, piezo_4mm(392, -34.5, 85.6), 0.1),
    (BERLINCOURT, "4mm", EPS, np.diag([2920.0, 2920.0, 168.0]), 1.0),
    ("CdS, D. Berlincourt, H. Jaffe, L. R. Shiozawa, Phys. Rev. 129 (1963) 1009", "6mm", C,
     uniaxial(90.7, 58.1, 51.0, 93.8, 15.04, 16.3), 0.1),
    ("CdS, the same", "6mm", D, piezo_4mm(-14.0, -5.0, 10.3), 0.1),
    ("GaAs, H. J. McSkimin, A. Jayaraman, P. Andreatch, J. Appl. Phys. 38 (1967) 2362", "-43m", C,
     cubic(118.77, 53.72, 59.44), 0.01),
    ("GaAs, G. Arlt, P. Quadflieg, Phys. Status Solidi 25 (1968) 323 (memory)", "-43m", E,
     piezo_cubic(-0.16), 0.01),
    ("calcite, L. Peselnick, R. A. Robie, J. Appl. Phys. 33 (1962) 2889", "-3m", C,
     trigonal(137, 48.2, 56.8, -20.0, 81.1, 35.0, 44.4, 1), 0.1),
    ("SrTiO3, J. B. Wachtman, M. L. Wheat, S. Marzullo, J. Res. NBS 67A (1963) 193", "m-3m", C,
     cubic(315.6, 102.7, 121.5), 0.1),
]  # fmt: skip


@pytest.mark.parametrize(("source", "symbol", "tensor_kind", "values", "digit"), PUBLISHED)
def test_a_published_set_obeys_its_class_within_its_digits(
    source: str, symbol: str, tensor_kind: object, values: FloatArray, digit: float
) -> None:
    stated = Measurement(source, tensor_kind, values, axes="ieee", rounding=digit)
    result = audit(stated, PointGroup.from_symbol(symbol), noise=0.0)
    assert result.verdict == "consistent", result.message


def test_the_two_sign_sets_of_quartz_are_one_crystal() -> None:
    group = PointGroup.from_symbol("32")
    half_turn = np.diag([-1.0, -1.0, 1.0])
    # 1949 to 1978: half a turn about z; the sets of e belong to the two hands, which
    # reverses all of e besides.
    assert to_matrix(C, turned(to_full(C, QUARTZ_1949_C), half_turn)) == pytest.approx(QUARTZ_1978_C)
    assert -to_matrix(E, turned(to_full(E, QUARTZ_1949_E), half_turn)) == pytest.approx(QUARTZ_1978_E)
    for values, tensor_kind, flips in ((QUARTZ_1949_C, C, ("14",)), (QUARTZ_1949_E, E, ("11",))):
        result = audit(Measurement("q", tensor_kind, values, axes="ieee"), group)
        found = {choice.flips: choice.turn for choice in result.equivalent_axes}
        assert found[flips] == "180 degrees about [001]"
    assert found["11", "14"] == "the other hand"


def one_sign(values: FloatArray) -> FloatArray:
    values = values.copy()
    values[1, 5] *= -1.0
    return values


def exchanged(values: FloatArray) -> FloatArray:
    values = values.copy()
    values[0, 0], values[0, 3] = values[0, 3], values[0, 0]
    return values


def ten_times(values: FloatArray) -> FloatArray:
    values = values.copy()
    values[1, 5] *= 10.0
    return values


@pytest.mark.parametrize(
    ("fault", "sort", "entries"),
    [
        (one_sign, "sign", ("26",)),
        (exchanged, "swap", ("11", "14")),
        (ten_times, "power-of-ten", ("26",)),
    ],
)
def test_a_slip_of_one_entry_stays_a_violation_and_is_named(
    fault: Callable[[FloatArray], FloatArray], sort: str, entries: tuple[str, ...]
) -> None:
    group = PointGroup.from_symbol("32")
    result = audit(Measurement("q", E, fault(QUARTZ_1978_E), axes="ieee"), group)
    assert (result.verdict, result.cause) == ("violates", "slip")
    assert result.best is not None
    assert result.best.slip is not None
    assert (result.best.slip.sort, result.best.slip.entries) == (sort, entries)


@pytest.mark.parametrize(
    ("change", "attribute", "found"),
    [
        (lambda e: e[:, [0, 1, 2, 5, 3, 4]], "order", ("11", "22", "33", "12", "23", "13")),
        (lambda e: e.T.reshape(3, 6), "layout", "by-columns"),
        (
            lambda e: e * [1, 1, 1, 2, 2, 2],
            "factor",
            "columns 4-6 doubled (factors of strain, as in d and s)",
        ),
    ],
)
def test_another_order_layout_or_factor_is_named(
    change: Callable[[FloatArray], FloatArray], attribute: str, found: object
) -> None:
    result = audit(Measurement("q", E, change(QUARTZ_1978_E), axes="ieee"), PointGroup.from_symbol("32"))
    assert result.verdict == "consistent-otherwise"
    assert result.best is not None
    assert getattr(result.best, attribute) == found


def test_the_transposed_array_is_read_by_its_shape() -> None:
    result = audit(Measurement("q", E, QUARTZ_1978_E.T, axes="ieee"), PointGroup.from_symbol("32"))
    assert result.verdict == "consistent"
    assert result.measurement.stated_layout == "transposed"


def test_axes_given_as_a_matrix_are_used() -> None:
    group = PointGroup.from_symbol("312")
    assert np.abs(standard_rotation(group) - np.eye(3)).max() > 0.1
    wrong = audit(Measurement("q", E, QUARTZ_1978_E, axes="file"), group, explain=False)
    right = audit(Measurement("q", E, QUARTZ_1978_E, axes=standard_rotation(group)), group)
    assert (wrong.verdict, right.verdict) == ("violates", "consistent")
