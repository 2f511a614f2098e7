"""Tensor kinds, the spaces their index symmetry leaves, and their allowed forms in a point group."""

from sitesym.tensors.contraction import Contraction, contraction, to_full, to_matrix
from sitesym.tensors.forms import AllowedForm, Coefficient, allowed_form
from sitesym.tensors.kinds import TensorKind, all_kinds, kind, kind_from_jahn
from sitesym.tensors.senses import SenseChoice, sense_choices, turned
from sitesym.tensors.spaces import TensorSpace, independent_count

__all__ = [
    "AllowedForm",
    "Coefficient",
    "Contraction",
    "SenseChoice",
    "TensorKind",
    "TensorSpace",
    "all_kinds",
    "allowed_form",
    "contraction",
    "independent_count",
    "kind",
    "kind_from_jahn",
    "sense_choices",
    "to_full",
    "to_matrix",
    "turned",
]
