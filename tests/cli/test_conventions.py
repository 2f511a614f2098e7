"""`sitesym conventions`: the page that explains every other output."""

from __future__ import annotations

import json

from click.testing import CliRunner

from sitesym.audit.result import VERDICTS
from sitesym.cli.main import main
from sitesym.groups import PointGroup
from sitesym.tensors import all_kinds, allowed_form, kind


def test_every_kind_of_tensor_is_listed_with_its_factors() -> None:
    document = json.loads(CliRunner().invoke(main, ["conventions", "--format", "json"]).output)
    listed = {kind["property"]: kind["factors in contracted indices"] for kind in document["kinds"]}
    assert listed == {kind.name: kind.factor_rule for kind in all_kinds()}


def test_the_page_names_axes_edition_order_and_labels() -> None:
    text = " ".join(CliRunner().invoke(main, ["conventions"]).output.split())
    statements = (
        "IEEE Std 176, edition 1978",
        "11 22 33 23 13 12",
        "v_new = R v_file",
        "R. S. Mulliken",
        "-4+ is S4",
    )
    assert all(statement in text for statement in statements)


def test_the_page_holds_what_the_help_promises() -> None:
    text = " ".join(CliRunner().invoke(main, ["conventions"]).output.split())
    words = ("forbidden", "independent", *VERDICTS, "robust", "fragile")
    assert all(word in text for word in words)


def test_the_relations_named_on_the_page_are_those_of_the_forms() -> None:
    group = PointGroup.from_symbol("32")
    for name, coefficient in (
        ("piezoelectric-strain", "-2"), ("piezoelectric-stress", "-1"), ("second-harmonic", "-1"),
    ):  # fmt: skip
        assert str(allowed_form(kind(name), group).components["26"]["11"]) == coefficient
