"""From a crystal structure file to its site symmetries, irreps and symmetry-allowed tensor components.

>>> import sitesym
>>> group = sitesym.PointGroup.from_symbol("32")
>>> form = sitesym.allowed_form(sitesym.kind("piezoelectric-strain"), group)
>>> form.independent, str(form.components["26"]["11"])
(('11', '14'), '-2')

Names load on first use, so that ``import sitesym`` stays light.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from sitesym.audit import AuditResult, Measurement, audit_tensor
    from sitesym.crystals import (
        Axes,
        Crystal,
        CrystalSymmetry,
        Site,
        axes_for,
        find_symmetry,
        read_crystal,
        read_crystals,
    )
    from sitesym.errors import SitesymError
    from sitesym.groups import CharacterTable, PointGroup, character_table, standard_rotation
    from sitesym.screening import screen
    from sitesym.tensors import (
        AllowedForm,
        TensorKind,
        TensorSpace,
        all_kinds,
        allowed_form,
        independent_count,
        kind,
        kind_from_jahn,
    )

    audit = audit_tensor

__version__ = "0.1.0"

_HOMES = {
    "sitesym.audit": ("AuditResult", "Measurement", "audit_tensor"),
    "sitesym.crystals": (
        "Axes", "Crystal", "CrystalSymmetry", "Site", "axes_for", "find_symmetry", "read_crystal",
        "read_crystals",
    ),
    "sitesym.errors": ("SitesymError",),
    "sitesym.groups": ("CharacterTable", "PointGroup", "character_table", "standard_rotation"),
    "sitesym.screening": ("screen",),
    "sitesym.tensors": (
        "AllowedForm", "TensorKind", "TensorSpace", "all_kinds", "allowed_form", "independent_count", "kind",
        "kind_from_jahn",
    ),
}  # fmt: skip
_HOME_OF = {name: home for home, names in _HOMES.items() for name in names}

__all__ = [
    "AllowedForm",
    "AuditResult",
    "Axes",
    "CharacterTable",
    "Crystal",
    "CrystalSymmetry",
    "Measurement",
    "PointGroup",
    "Site",
    "SitesymError",
    "TensorKind",
    "TensorSpace",
    "all_kinds",
    "allowed_form",
    "audit_tensor",
    "axes_for",
    "character_table",
    "find_symmetry",
    "independent_count",
    "kind",
    "kind_from_jahn",
    "read_crystal",
    "read_crystals",
    "screen",
    "standard_rotation",
]


def __getattr__(name: str) -> Any:
    """The public name, from the module that defines it; `audit` is a package that can be called."""
    if name == "audit":
        return importlib.import_module("sitesym.audit")
    if name not in _HOME_OF:
        raise AttributeError(f"module 'sitesym' has no attribute {name!r}")
    return getattr(importlib.import_module(_HOME_OF[name]), name)


def __dir__() -> list[str]:
    return [*__all__, "__version__"]
