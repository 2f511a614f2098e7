"""Kinds and Jahn symbols: what is understood, and how the rest is refused."""

import pickle

import numpy as np
import pytest

from sitesym.errors import (
    AxesError,
    NotAGroupError,
    SitesymError,
    SymmetryError,
    TensorInputError,
    UsageError,
)
from sitesym.groups import PointGroup
from sitesym.tensors import TensorKind, all_kinds, allowed_form, contraction, kind, kind_from_jahn


@pytest.mark.parametrize(
    ("jahn", "dimension", "rank"),
    [
        ("V", 3, 1), ("[V2]", 6, 2), ("{V2}", 3, 2), ("V[V2]", 18, 3), ("[V3]", 10, 3), ("{V3}", 1, 3),
        ("[[V2]2]", 21, 4), ("[V2][V2]", 36, 4), ("[V2]2", 36, 4), ("V2[V2]", 54, 4), ("[[V2]3]", 56, 6),
        ("[[V2]4]", 126, 8), ("{[V2]2}", 15, 4), ("e{V2}V", 9, 3), ("aeV2", 9, 2), ("e", 1, 0),
        ("[V²]", 6, 2),
        ("[V^2]", 6, 2), ("εV", 3, 1), ("[VV]", 6, 2), (" V [V2] ", 18, 3), ("V6", 729, 6),
    ],
)  # fmt: skip
def test_jahn_symbols_have_their_number_of_components(jahn: str, dimension: int, rank: int) -> None:
    found = kind_from_jahn(jahn)
    assert (found.symmetry.dimension, found.rank) == (dimension, rank)


def test_e_and_a_mark_axial_and_time_odd() -> None:
    assert [(k.axial, k.time_odd) for k in map(kind_from_jahn, ("V", "eV", "aV", "aeV", "eaV"))] == [
        (False, False),
        (True, False),
        (False, True),
        (True, True),
        (True, True),
    ]


@pytest.mark.parametrize(
    ("text", "rule"),
    [
        ("", "empty"), ("[V2", "not closed"), ("V2]", "nothing begins with"), ("X", "none of"),
        ("eeV", "once"),
        ("[V2[V2]]", "power of one thing"), ("[]", "power of one thing"), ("V9", "from 1 to 8"),
        ("V0", "from 1 to 8"),
        ("V99999999999", "from 1 to 8"), ("[V5]V4", "rank 9"), ("V8", "6561 components"), ("Ve", "none of"),
        ("[V[V2]]", "power of one thing"), ("2V", "none of"), ("[V2}", "not closed"),
        ("{V4}", "no 4 of 3"), ("V{{V3}2}", "no 2 of 1"), ("[[[V8]8]8]", "rank 512"),
    ],
)  # fmt: skip
def test_other_symbols_are_refused_with_the_rule_they_break(text: str, rule: str) -> None:
    with pytest.raises(TensorInputError) as caught:
        kind_from_jahn(text)
    assert rule in caught.value.rule
    assert caught.value.value == repr(text)


def test_an_unknown_kind_is_refused_with_near_names() -> None:
    with pytest.raises(UsageError) as caught:
        kind("piezoelectric")
    assert "piezoelectric-strain" in caught.value.next_step


def test_part_of_a_name_is_refused_with_all_names_that_hold_it() -> None:
    with pytest.raises(UsageError) as caught:
        kind("Piezo")
    held = [k.name for k in all_kinds() if "piezo" in k.name]
    assert len(held) == 6
    assert caught.value.next_step == f"near: {', '.join(held)}"


def test_names_of_kinds_are_unique_and_their_symbols_are_read() -> None:
    names = [k.name for k in all_kinds()]
    assert len(set(names)) == len(names)
    for k in all_kinds():
        assert kind(k.name) is k
        assert k.unit
        assert k.indices


#: Index symmetry and factors of each kind. Symmetries: H. A. Jahn, Acta Cryst. 2 (1949) 30, and J. F. Nye,
#: Physical Properties of Crystals (1957), from memory. Factors: 2 where the contracted pair is summed over
#: twice, for 23 and 32 (stress, polarisations, fields, flux densities), or is an engineering strain; common
#: practice. The third- and fourth-order stiffness of Brugger has none.
DEFINED = {
    "pyroelectric": ("V", ()), "spontaneous-polarisation": ("V", ()),
    "permittivity": ("[V2]", ()), "impermeability": ("[V2]", ()), "thermal-expansion": ("[V2]", ()),
    "thermal-conductivity": ("[V2]", ()), "electrical-conductivity": ("[V2]", ()), "seebeck": ("V2", ()),
    "gyration": ("e[V2]", ()), "hall": ("e{V2}V", ()),
    "piezoelectric-strain": ("V[V2]", (2,)), "piezoelectric-stress": ("V[V2]", (1,)),
    "piezoelectric-voltage": ("V[V2]", (2,)), "piezoelectric-stiffness": ("V[V2]", (1,)),
    "electro-optic": ("[V2]V", (1,)), "second-harmonic": ("V[V2]", (1,)),
    "second-harmonic-kleinman": ("[V3]", (1,)), "electrogyration": ("eV[V2]", (1,)),
    "elastic-stiffness": ("[[V2]2]", (1, 1)), "elastic-compliance": ("[[V2]2]", (2, 2)),
    "elasto-optic": ("[V2][V2]", (1, 1)), "piezo-optic": ("[V2][V2]", (1, 2)),
    "electrostriction": ("[V2][V2]", (1, 2)), "kerr": ("[V2][V2]", (1, 2)),
    "magnetoresistance": ("[V2][V2]", (1, 2)), "flexoelectric": ("V2[V2]", (1,)),
    "third-harmonic": ("V[V3]", ()), "third-harmonic-kleinman": ("[V4]", ()),
    "nonlinear-piezoelectric": ("V[[V2]2]", (1, 1)),
    "third-order-elastic": ("[[V2]3]", (1, 1, 1)), "fourth-order-elastic": ("[[V2]4]", (1, 1, 1, 1)),
    "displacement-parameter": ("[V2]", ()), "electric-field-gradient": ("[V2]", ()), "shielding": ("V2", ()),
    "born-charge": ("V2", ()),
}  # fmt: skip


def test_kinds_have_the_index_symmetry_and_the_factors_of_the_trade() -> None:
    defined = {k.name: (k.jahn, k.pair_factors) for k in all_kinds() if k.name in DEFINED}
    assert defined == DEFINED
    assert [k.name for k in all_kinds() if k.traceless] == ["electric-field-gradient"]


def test_every_contracted_pair_of_a_kind_has_its_factor() -> None:
    for k in all_kinds():
        assert len(k.pair_factors) == contraction(k).blocks.count(6), k.name


@pytest.mark.parametrize(
    ("jahn", "factors", "rule"),
    [
        ("V[V2]", (2,), "factor 2 in columns 4-6"),
        ("[V2]V", (2,), "factors 2 where"),  # the pair is in the rows
        ("[V2][V2]", (2, 1), "factors 2, 1 where"),
        ("[V2][V2]", (1, 2), "factor 2 in columns 4-6 only"),
        ("[[V2]2]", (2, 2), "4 where both are"),
        ("V[[V2]2]", (1, 1), "no factor"),
    ],
)
def test_factors_in_words_are_those_of_the_pairs(jahn: str, factors: tuple[int, ...], rule: str) -> None:
    assert rule in TensorKind("name", "s", jahn, "1", "all", factors).factor_rule


def test_written_notation_is_never_finer_than_the_symmetry_obeyed() -> None:
    for k in all_kinds():
        assert k.written.rank == k.symmetry.rank
        assert k.written.dimension >= k.symmetry.dimension


def test_the_antisymmetric_cube_of_a_vector_is_a_pseudoscalar() -> None:
    # {V3} has the sign of the handedness: allowed exactly in the 11 groups without improper operations
    for symbol in ("1", "222", "32", "432"):
        form = allowed_form(kind_from_jahn("{V3}"), PointGroup.from_symbol(symbol))
        assert form.full({form.independent[0]: 1.0})[0, 1, 2] == 1.0
        assert form.full({form.independent[0]: 1.0})[1, 0, 2] == -1.0
    assert allowed_form(kind_from_jahn("{V3}"), PointGroup.from_symbol("-4")).independent == ()


def raised(action: object) -> SitesymError:
    with pytest.raises(SitesymError) as caught:
        action()  # type: ignore[operator]
    return caught.value


@pytest.mark.parametrize(
    ("action", "error"),
    [
        (lambda: kind("x"), UsageError),
        (lambda: kind_from_jahn("["), TensorInputError),
        (lambda: PointGroup.from_symbol("43"), UsageError),
        (
            lambda: PointGroup.from_cartesian(np.array([np.eye(3), np.diag([1.0, 1, -1]), -np.eye(3)])),
            NotAGroupError,
        ),
        (lambda: PointGroup.from_fractional(np.eye(3)[None], np.zeros((3, 3))), SymmetryError),
        (lambda: PointGroup.from_symbol("1").rotated(-np.eye(3)), AxesError),
    ],
)
def test_errors_survive_pickling_with_all_their_fields(action: object, error: type[SitesymError]) -> None:
    before = raised(action)
    after = pickle.loads(pickle.dumps(before))
    assert type(after) is type(before) is error
    assert str(after) == str(before)
    assert (after.what, after.value, after.rule, after.next_step) == before.args[:4]
