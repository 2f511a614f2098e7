"""Units as written: their size, their quantity, and whether the values fit them."""

from __future__ import annotations

import numpy as np
import pytest

from sitesym.audit.unit_text import read_unit
from sitesym.audit.units import MAGNITUDE_SOURCE, UNKNOWN, USUAL_MAGNITUDES, si_factor, unit_warnings
from sitesym.tensors import all_kinds, kind


@pytest.mark.parametrize(
    ("name", "unit", "factor"),
    [
        ("elastic-stiffness", "GPa", 1e9),
        ("elastic-stiffness", "kbar", 1e8),
        ("elastic-stiffness", "Mbar", 1e11),
        ("elastic-stiffness", "10^11 dyn/cm^2", 1e10),
        ("elastic-stiffness", "10^9 N m-2", 1e9),
        ("elastic-compliance", "(TPa)^-1", 1e-12),
        ("elastic-compliance", "1e-12 m^2/N", 1e-12),
        ("elastic-compliance", "1/Mbar", 1e-11),
        ("piezoelectric-strain", "pC/N", 1e-12),
        ("piezoelectric-strain", "pm/V", 1e-12),
        ("piezoelectric-strain", "1e-12 m/V", 1e-12),
        ("piezoelectric-stress", "C/m²", 1.0),
        ("piezoelectric-stress", "μC/cm^2", 1e-2),
        ("pyroelectric", "uC m^-2 K^-1", 1e-6),
        ("pyroelectric", "nC/(cm^2 K)", 1e-5),
        ("electro-optic", "pm/V", 1e-12),
        ("displacement-parameter", "Å^2", 1.0),
        ("permittivity", "relative", 1.0),
        # CODATA 2018: the electric constant is 8.8541878128e-12 F/m.
        ("permittivity", "F/m", 1.0 / 8.8541878128e-12),
    ],
)
def test_a_unit_is_read_as_a_factor_to_the_si_unit_of_the_kind(name: str, unit: str, factor: float) -> None:
    assert si_factor(kind(name), unit) == pytest.approx(factor, rel=1e-12)


def test_the_si_unit_of_every_kind_is_readable_and_has_factor_one() -> None:
    assert {k.name: si_factor(k, k.unit) for k in all_kinds()} == {k.name: 1.0 for k in all_kinds()}


@pytest.mark.parametrize("text", ["furlong", "", "GPa)", "(GPa", "C//N", "m^", "N^x", "%", "zPaa"])
def test_a_text_that_is_no_unit_stays_unknown(text: str) -> None:
    assert read_unit(text) is None


def test_a_division_covers_the_next_factor_only() -> None:
    bare, bracketed = read_unit("C/m^2 K"), read_unit("C/(m^2 K)")
    assert bare is not None
    assert bracketed is not None
    assert (bare.dimension[4], bracketed.dimension[4]) == (1, -1)


def test_a_unit_of_another_quantity_is_named_as_such() -> None:
    (warning,) = unit_warnings(kind("piezoelectric-stress"), "pC/N", np.array([2.3]))
    assert "piezoelectric-strain" in warning
    assert si_factor(kind("piezoelectric-stress"), "pC/N") is None


def test_kbar_called_gpa_is_noticed_with_the_range_and_the_unit_it_looks_like() -> None:
    # 10 x the largest stiffness of common solids: copper-like 1700 kbar, corundum-like 4980 kbar.
    (warning,) = unit_warnings(kind("elastic-stiffness"), "GPa", np.array([[4980.0, 1640.0]]))
    assert "kbar" in warning
    assert "1 to 1500 GPa" in warning
    assert MAGNITUDE_SOURCE in warning


def test_picocoulombs_called_coulombs_are_noticed() -> None:
    (warning,) = unit_warnings(kind("piezoelectric-strain"), "C/N", np.array([2.31]))
    assert "pC/N" in warning


def test_usual_values_and_unknown_units_raise_no_warning() -> None:
    assert unit_warnings(kind("elastic-stiffness"), "GPa", np.array([165.6, 63.9, 79.5])) == ()
    assert unit_warnings(kind("elastic-stiffness"), UNKNOWN, np.array([4980.0])) == ()
    assert unit_warnings(kind("piezoelectric-stress"), "C/m^2", np.zeros((3, 6))) == ()


def test_every_unit_offered_as_an_alternative_belongs_to_its_kind() -> None:
    offered = [(name, unit) for name, usual in USUAL_MAGNITUDES.items() for unit in usual.quoted]
    assert [pair for pair in offered if si_factor(kind(pair[0]), pair[1]) is None] == []
