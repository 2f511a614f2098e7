"""Imports between the layers of the package go one way only."""

from __future__ import annotations

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

import sitesym

PACKAGE = Path(sitesym.__file__).parent

#: What the modules of each layer may import, besides their own layer and the foundation.
MAY_IMPORT = {
    "groups": set(),
    "tensors": {"groups"},
    "crystals": {"groups"},
    "audit": {"groups", "tensors", "crystals"},
    "vibrations": {"groups", "tensors", "crystals"},
    "screening": {"groups", "tensors", "crystals"},
    "reports": {"groups", "tensors", "crystals", "audit", "vibrations", "screening"},
    "cli": {"groups", "tensors", "crystals", "audit", "vibrations", "screening", "reports"},
}

#: Modules under everything; they may import each other and nothing else of the package.
FOUNDATION = {"errors", "tolerances", "arrays", "choices", "formats", "__init__"}


def imported_modules(source: str, module: str) -> Iterator[str]:
    """Full names of the package's own modules that a source text imports, those inside functions included."""
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{module} uses a relative import"
            names = [f"{node.module}.{alias.name}" for alias in node.names]
        else:
            continue
        yield from (name for name in names if name.split(".")[0] == "sitesym")


def layer_of(module: str) -> str:
    """The layer a module belongs to: the first name below the package."""
    parts = module.split(".")
    name = parts[1] if len(parts) > 1 else "__init__"
    return name if name in MAY_IMPORT or name in FOUNDATION else "__init__"


def forbidden_arrows(source: str, module: str) -> list[str]:
    """One sentence for each import that points the wrong way."""
    layer = layer_of(module)
    allowed = FOUNDATION | MAY_IMPORT.get(layer, set()) | {layer}
    return [
        f"{module} ({layer}) imports {name} ({layer_of(name)})"
        for name in imported_modules(source, module)
        if layer_of(name) not in allowed
    ]


def package_modules() -> list[tuple[Path, str]]:
    """Every source file of the package with its module name."""
    paths = sorted(PACKAGE.rglob("*.py"))
    return [(path, ".".join(("sitesym", *path.relative_to(PACKAGE).with_suffix("").parts))) for path in paths]


def test_no_module_imports_a_layer_above_its_own() -> None:
    wrong = [
        arrow
        for path, module in package_modules()
        if module != "sitesym.__init__"  # the public surface shows names of every layer
        for arrow in forbidden_arrows(path.read_text(encoding="utf-8"), module)
    ]
    assert not wrong, "\n".join(wrong)


def test_every_module_belongs_to_a_known_layer() -> None:
    known = set(MAY_IMPORT) | FOUNDATION
    assert {module.split(".")[1] for _, module in package_modules()} <= known


@pytest.mark.parametrize(
    ("module", "source"),
    [
        ("sitesym.groups.table", "from sitesym.tensors import kinds"),
        ("sitesym.tensors.forms", "import sitesym.crystals.sites"),
        ("sitesym.crystals.sites", "def late():\n    from sitesym.tensors.kinds import KINDS"),
        ("sitesym.reports.render", "from sitesym import cli"),
        ("sitesym.errors", "from sitesym.groups import PointGroup"),
    ],
)
def test_an_arrow_that_points_the_wrong_way_is_named_with_both_modules(module: str, source: str) -> None:
    (sentence,) = forbidden_arrows(source, module)
    assert module in sentence
    assert sentence.count("sitesym.") == 2 or "sitesym.cli" in sentence


def test_an_arrow_that_points_down_is_allowed() -> None:
    assert (
        forbidden_arrows("from sitesym.groups import PointGroup\nimport numpy", "sitesym.reports.render")
        == []
    )
