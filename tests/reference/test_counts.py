"""Numbers of independent components, against published and computed counts, by routes that share no code.

Reference: counts.json (sources, grades and status stand in it).
"""

from __future__ import annotations

import json
from functools import reduce
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from sitesym.groups import PointGroup
from sitesym.groups.symbols import SCHOENFLIES, rotation_about
from sitesym.tensors import (
    TensorKind,
    TensorSpace,
    all_kinds,
    allowed_form,
    independent_count,
    kind_from_jahn,
)

REFERENCE: dict[str, Any] = json.loads((Path(__file__).parent / "counts.json").read_text(encoding="utf-8"))
LABELS = list(REFERENCE["labels"])
#: Groups for which rank six is averaged too: one of each kind that is hard (trigonal, hexagonal, cubic).
RANK_SIX = ("32", "6/m", "-43m")


def by_label(label: str) -> TensorKind:
    """The kind of a label of the reference; 'ns' there marks two pairs that do not commute."""
    return kind_from_jahn({"V[V2]2ns": "V[V2][V2]"}.get(label, label))


def index_projector(kind: TensorKind) -> np.ndarray:
    """Orthogonal projector onto the tensors that obey the index symmetry, built from where each full index
    goes.
    """
    component, sign = kind.symmetry.full_indices
    columns = np.zeros((len(component), kind.symmetry.dimension))
    columns[np.arange(len(component)), component] = sign
    return columns @ columns.T / np.maximum(np.abs(columns).sum(axis=0), 1)[component]


def averaged_count(kind: TensorKind, group: PointGroup) -> int:
    """Trace of (average of Kronecker powers over the group) times (index projector)."""
    total = np.zeros((3**kind.rank, 3**kind.rank))
    for rotation in group.rotations_cart:
        sign = np.linalg.det(rotation) if kind.axial else 1.0
        total += sign * reduce(np.kron, [rotation] * kind.rank, np.eye(1))
    trace = float(np.sum(total / group.order * index_projector(kind).T))
    assert trace == pytest.approx(round(trace), abs=1e-9)
    return round(trace)


def null_space_count(kind: TensorKind, group: PointGroup) -> int:
    """Dimension of the tensors of the index symmetry that every generator leaves unchanged."""
    one = np.eye(3**kind.rank)
    conditions = [one - index_projector(kind)]
    for g in group.generators:
        rotation = group.rotations_cart[g]
        sign = np.linalg.det(rotation) if kind.axial else 1.0
        conditions.append(sign * reduce(np.kron, [rotation] * kind.rank, np.eye(1)) - one)
    return 3**kind.rank - int(np.linalg.matrix_rank(np.concatenate(conditions), tol=1e-6))


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_counts_of_all_labels_equal_the_reference_by_characters_and_by_generators(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    for label, expected in REFERENCE["computed"][symbol].items():
        assert independent_count(by_label(label), group) == expected, label
        assert len(allowed_form(by_label(label), group).independent) == expected, label


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_counts_up_to_rank_three_equal_the_null_space_in_the_full_tensor(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    for label in LABELS:
        if by_label(label).rank <= 3:
            assert null_space_count(by_label(label), group) == REFERENCE["computed"][symbol][label], label


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_counts_up_to_rank_four_equal_the_average_of_kronecker_powers(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    for label in LABELS:
        if by_label(label).rank <= 4:
            assert averaged_count(by_label(label), group) == REFERENCE["computed"][symbol][label], label


@pytest.mark.parametrize("symbol", RANK_SIX)
def test_counts_of_rank_six_equal_the_average_of_kronecker_powers(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    for label in ("[[V2]3]", "[[V2]2][V2]"):
        assert averaged_count(by_label(label), group) == REFERENCE["computed"][symbol][label], label


@pytest.mark.parametrize("kind", all_kinds(), ids=lambda kind: kind.name)
def test_every_named_kind_has_the_counts_of_its_index_symmetry(kind: TensorKind) -> None:
    # an antisymmetric pair is an axial vector, with e a polar one; factors may change places (Jahn 1949)
    label = {"e{V2}V": "V2", "[V2]V": "V[V2]"}.get(kind.jahn, kind.jahn)
    for symbol, counts in REFERENCE["computed"].items():
        assert label in counts, f"counts.json has no number of {label} for {symbol}"
        found = allowed_form(kind, PointGroup.from_symbol(symbol)).independent_count
        assert found == counts[label] - int(kind.traceless), symbol


@pytest.mark.parametrize("label", REFERENCE["literature"])
def test_counts_equal_the_published_tables_typed_by_hand(label: str) -> None:
    # Nye 1985 appendix E; IT D 1.1; Brugger 1965; Hearmon 1953; Brendel 1979; from memory (literature_status)
    for symbol, expected in REFERENCE["literature"][label].items():
        assert independent_count(by_label(label), PointGroup.from_symbol(symbol)) == expected, symbol


def test_counts_equal_those_whose_text_was_seen() -> None:
    # IT D (2013) 1.1.4.9 and (2006) table 1.7.2.4: general rank four
    general = {"1": 81, "2": 41, "222": 21, "4": 21, "4mm": 11, "3": 27, "-3": 27}
    assert {s: independent_count(by_label("V4"), PointGroup.from_symbol(s)) for s in general} == general
    # Y. Cho, K. Yamanouchi, J. Appl. Phys. 61 (1987) 875: electrostriction, third-order dielectric,
    # third-order piezoelectric and third-order elastic constants of LiNbO3 (3m)
    labels = ("[V2][V2]", "[V3]", "V[[V2]2]", "[[V2]3]")
    niobate = PointGroup.from_symbol("3m")
    assert [independent_count(by_label(label), niobate) for label in labels] == [8, 3, 13, 14]


@pytest.mark.parametrize(
    ("name", "holds"),
    [
        ("polar (10)", lambda group: group.is_polar),
        ("enantiomorphic / chiral (11)", lambda group: group.is_chiral),
        ("noncentrosymmetric (21)", lambda group: not group.has_inversion),
        ("Laue (11)", lambda group: group.has_inversion),
        ("piezoelectric (20)", lambda group: independent_count(by_label("V[V2]"), group) > 0),
        (
            "gyrotropic, symmetric gyration tensor (15)",
            lambda group: independent_count(by_label("e[V2]"), group) > 0,
        ),
        (
            "gyrotropic incl. antisymmetric part (18)",
            lambda group: independent_count(by_label("eV2"), group) > 0,
        ),
        ("SHG allowed with Kleinman (18)", lambda group: independent_count(by_label("[V3]"), group) > 0),
    ],
)
def test_classes_with_a_property_are_those_of_the_census(name: str, holds: Any) -> None:
    assert [s for s in SCHOENFLIES if holds(PointGroup.from_symbol(s))] == REFERENCE["census"][name]


def axial_group(name: str) -> PointGroup:
    """A Curie group with its axis along z, as a group of ninefold rotations: no tensor of rank up to 8 can
    tell them apart, because it holds no component beyond cos(8 phi).
    """
    rotations = [rotation_about(np.array([0.0, 0.0, 1.0]), 2.0 * np.pi * k / 9) for k in range(9)]
    across, along = np.diag([1.0, 1.0, -1.0]), np.diag([-1.0, 1.0, 1.0])
    twofold = np.diag([1.0, -1.0, -1.0])
    extra = {
        "inf": [],
        "inf/m": [across],
        "inf2": [twofold],
        "infm": [along],
        "inf/mm": [across, along, across @ along],
    }[name]
    return PointGroup.from_cartesian(np.array([r @ e for e in [np.eye(3), *extra] for r in rotations]))


@pytest.mark.parametrize("name", ["inf", "inf/m", "inf2", "infm", "inf/mm"])
def test_counts_in_curie_groups_with_one_axis_equal_the_reference(name: str) -> None:
    group = axial_group(name)
    for label, expected in REFERENCE["curie_groups"][name].items():
        assert independent_count(by_label(label), group) == expected, label
        if by_label(label).rank <= 4:
            assert allowed_form(by_label(label), group).independent_count == expected, label


@pytest.mark.parametrize("name", ["inf inf", "inf inf m"])
def test_counts_of_isotropic_tensors_equal_the_reference(name: str) -> None:
    # mean over SO(3): (1/pi) integral of (1 - cos w) chi(w), exact on an even grid for sums of cosines
    angles = 2.0 * np.pi * np.arange(64) / 64
    traces = 1.0 + 2.0 * np.cos(np.outer(np.arange(9), angles))
    for label, expected in REFERENCE["curie_groups"][name].items():
        kind = by_label(label)
        mean = float(((1.0 - np.cos(angles)) * kind.symmetry.character(traces)).mean())
        odd = (kind.rank % 2 == 1) != kind.axial
        assert round(mean, 9) * (0 if odd and name == "inf inf m" else 1) == expected, label


def magnetic_groups() -> list[tuple[str, str, PointGroup]]:
    """The 122 magnetic point groups: 32 colourless, 58 black-white (one for each pair of a class and the
    class of a subgroup of index 2), 32 grey.
    """
    groups: list[tuple[str, str, PointGroup]] = []
    for symbol in SCHOENFLIES:
        group = PointGroup.from_symbol(symbol)
        doubled = np.concatenate([group.rotations_cart, group.rotations_cart])
        flags = np.repeat([False, True], group.order)
        groups.append(("colourless", symbol, group))
        groups.append(("grey", symbol, PointGroup.from_cartesian(doubled, flags)))
        pairs: dict[str, PointGroup] = {}
        for kept in index_two_subgroups(group):
            half = group.subgroup(kept)
            reversing = np.array([i not in kept for i in range(group.order)])
            pairs.setdefault(half.symbol, PointGroup.from_cartesian(group.rotations_cart, reversing))
        groups.extend(("black-white", f"{symbol}({half})", g) for half, g in pairs.items())
    return groups


def index_two_subgroups(group: PointGroup) -> list[list[int]]:
    """Kernels of the homomorphisms onto {1, -1}, from all choices of signs on the generators."""
    subgroups: list[list[int]] = []
    for choice in range(1, 2 ** len(group.generators)):
        signs = {0: 1}
        chosen = {g: -1 if choice >> k & 1 else 1 for k, g in enumerate(group.generators)}
        frontier = [0]
        while frontier:
            element = frontier.pop()
            for g, sign in chosen.items():
                product = int(group.product_table[element, g])
                if product not in signs:
                    signs[product] = signs[element] * sign
                    frontier.append(product)
        values = np.array([signs[i] for i in range(group.order)])
        if (values[group.product_table] == np.outer(values, values)).all():
            subgroups.append(np.flatnonzero(values > 0).tolist())
    return subgroups


def test_magnetic_classes_that_allow_each_property_are_as_many_as_published() -> None:
    groups = magnetic_groups()
    assert [sum(kind == k for kind, _, _ in groups) for k in ("colourless", "black-white", "grey")] == [
        32,
        58,
        32,
    ]
    expected = REFERENCE["magnetic_counts"]
    jahn = {
        "P (polar vector, t-even)": "V",
        "M (axial vector, t-odd)": "aeV",
        "T (polar vector, t-odd; toroidal)": "aV",
        "ME alpha (axial rank 2, t-odd)": "aeV2",
        "piezomag Lambda (axial V[V2], t-odd)": "aeV[V2]",
        "piezoelectric (V[V2], t-even)": "V[V2]",
        "gyration (axial [V2], t-even)": "e[V2]",
    }
    allowed = {
        name: {index for index, (_, _, g) in enumerate(groups) if independent_count(kind_from_jahn(text), g)}
        for name, text in jahn.items()
    }
    assert {name: len(indices) for name, indices in allowed.items()} == expected["counts"]
    polarised, magnetised, toroidal, magnetoelectric, piezomagnetic, *_ = allowed.values()
    assert len(polarised & magnetised) == expected["both_P_and_M"]
    assert len(polarised & magnetised & toroidal) == expected["P_M_and_T"]
    assert len(piezomagnetic - magnetised) == expected["piezomagnetic_with_M_zero"]
    split = {kind: sum(groups[i][0] == kind for i in magnetoelectric) for kind in expected["ME_split"]}
    assert split == expected["ME_split"]


def test_forms_in_magnetic_groups_satisfy_every_operation_with_its_time_reversal() -> None:
    for _, name, group in magnetic_groups():
        for jahn in ("aeV2", "aV", "aeV[V2]"):
            kind = kind_from_jahn(jahn)
            form = allowed_form(kind, group)
            values = {key: 1.0 + 0.37 * k for k, key in enumerate(form.independent)}
            full = form.full(values).ravel()
            for rotation, flag in zip(group.rotations_cart, group.time_reversal, strict=True):
                sign = (np.linalg.det(rotation) if kind.axial else 1.0) * (-1.0 if flag else 1.0)
                image = sign * reduce(np.kron, [rotation] * kind.rank) @ full
                assert np.abs(image - full).max() < 1e-9, (name, jahn)


def test_a_tensor_space_has_the_dimension_of_its_index_symmetry_in_class_1() -> None:
    for label, expected in REFERENCE["computed"]["1"].items():
        assert TensorSpace.of(by_label(label)).dimension == expected, label
