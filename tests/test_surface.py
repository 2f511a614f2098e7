"""The names the package offers."""

from __future__ import annotations

import importlib
from pathlib import Path

import pytest

import sitesym


@pytest.mark.parametrize("name", sitesym.__all__)
def test_a_public_name_is_the_object_its_module_defines(name: str) -> None:
    value = getattr(sitesym, name)
    assert getattr(importlib.import_module(value.__module__), name) is value
    assert value.__doc__


def test_every_public_name_is_listed_and_no_other() -> None:
    assert sorted(sitesym._HOME_OF) == sitesym.__all__
    with pytest.raises(AttributeError, match="nothing"):
        getattr(sitesym, "nothing")  # noqa: B009


def test_the_layers_are_packages_with_a_docstring() -> None:
    layers = [path.parent for path in Path(sitesym.__file__).parent.glob("*/__init__.py")]
    assert {layer.name for layer in layers} >= {
        "groups",
        "tensors",
        "crystals",
        "screening",
        "reports",
        "cli",
    }
    assert all(importlib.import_module(f"sitesym.{layer.name}").__doc__ for layer in layers)
