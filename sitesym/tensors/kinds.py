"""Tensor kinds: what a property is called, how its indices behave, its unit and its contracted notation.

A kind states facts about the physics (index symmetry, parity, unit, factors), never anything about a
crystal class. Sources for index symmetries: H. A. Jahn, Acta Cryst. 2 (1949) 30; J. F. Nye, Physical
Properties of Crystals (1957).
"""

from __future__ import annotations

from dataclasses import dataclass
from difflib import get_close_matches
from functools import cached_property

from sitesym.errors import UsageError
from sitesym.tensors.indexsymmetry import IndexSymmetry, Product
from sitesym.tensors.jahn import read_jahn


@dataclass(frozen=True)
class TensorKind:
    """One property.

    ``jahn`` is the index symmetry the tensor obeys; ``written_as`` the coarser one in which it is
    customarily written (only for kinds such as second-harmonic-kleinman, which are full index symmetric but
    written as a 3x6 matrix). ``pair_factors`` holds, for each pair of indices that is contracted to 1..6,
    the factor its matrix elements 4..6 carry relative to the tensor component (2 for engineering strain, 1
    for stress). ``indices`` says what each index means. ``site`` marks tensors of one atom, ``traceless`` a
    vanishing trace.
    """

    name: str
    symbol: str
    jahn: str
    unit: str
    indices: str
    pair_factors: tuple[int, ...] = ()
    written_as: str = ""
    traceless: bool = False
    site: bool = False

    @cached_property
    def symmetry(self) -> IndexSymmetry:
        """The index symmetry obeyed."""
        return read_jahn(self.jahn).symmetry

    @cached_property
    def written(self) -> IndexSymmetry:
        """The index symmetry of the customary notation."""
        return read_jahn(self.written_as or self.jahn).symmetry

    @property
    def rank(self) -> int:
        """Number of indices."""
        return self.symmetry.rank

    @property
    def axial(self) -> bool:
        """Whether the tensor changes sign under improper operations on top of its indices."""
        return read_jahn(self.jahn).axial

    @property
    def time_odd(self) -> bool:
        """Whether time reversal changes its sign."""
        return read_jahn(self.jahn).time_odd

    @property
    def parity(self) -> str:
        """'polar' or 'axial'."""
        return "axial" if self.axial else "polar"

    @cached_property
    def notation(self) -> TensorKind:
        """The bare notation of the kind: kinds that differ in their physics only share it, and so their
        forms.
        """
        factors = self.pair_factors if set(self.pair_factors) - {1} else ()
        return TensorKind("", "", self.jahn, "", "", factors, self.written_as, self.traceless)

    @cached_property
    def without_factors(self) -> TensorKind:
        """The notation in which contracted components are those of the tensor."""
        return TensorKind("", "", self.jahn, "", "", (), self.written_as, self.traceless)

    @cached_property
    def factor_rule(self) -> str:
        """The factors of the contracted notation in words."""
        if not self.pair_factors or set(self.pair_factors) == {1}:
            return "no factor"
        if self.pair_factors == (2, 2):
            return "factor 2 where one index is 4-6, 4 where both are"
        if self.pair_factors == (1, 2):
            return "factor 2 in columns 4-6 only"
        pair_is_last = isinstance(self.written, Product) and self.written.factors[-1].rank == 2
        if self.pair_factors == (2,) and pair_is_last:
            return "factor 2 in columns 4-6"
        return (
            f"factors {', '.join(map(str, self.pair_factors))} where the pairs of indices, in turn, are 4-6"
        )


_BOTH = "both indices alike"
_KINDS = (
    TensorKind("pyroelectric", "p", "V", "C/(m^2 K)", "direction of the polarisation"),
    TensorKind("spontaneous-polarisation", "P", "V", "C/m^2", "direction of the polarisation"),
    TensorKind("permittivity", "eps", "[V2]", "1", _BOTH),
    TensorKind("impermeability", "B", "[V2]", "1", _BOTH),
    TensorKind("thermal-expansion", "alpha", "[V2]", "1/K", _BOTH),
    TensorKind("thermal-conductivity", "k", "[V2]", "W/(m K)", "heat flow, temperature gradient"),
    TensorKind("electrical-conductivity", "sigma", "[V2]", "S/m", "current, field"),
    TensorKind("seebeck", "S", "V2", "V/K", "field, temperature gradient"),
    TensorKind("gyration", "g", "e[V2]", "1", _BOTH),
    TensorKind("hall", "R", "e{V2}V", "m^3/C", "field and current (antisymmetric), magnetic flux density"),
    TensorKind("piezoelectric-strain", "d", "V[V2]", "C/N", "polarisation, stress pair", (2,)),
    TensorKind("piezoelectric-stress", "e", "V[V2]", "C/m^2", "polarisation, strain pair", (1,)),
    TensorKind("piezoelectric-voltage", "g", "V[V2]", "m^2/C", "field, stress pair", (2,)),
    TensorKind("piezoelectric-stiffness", "h", "V[V2]", "N/C", "field, strain pair", (1,)),
    TensorKind("electro-optic", "r", "[V2]V", "m/V", "optical pair, field", (1,)),
    TensorKind("second-harmonic", "d", "V[V2]", "m/V", "polarisation, pair of fields; d = chi2/2", (1,)),
    TensorKind("second-harmonic-kleinman", "d", "[V3]", "m/V", "polarisation, pair of fields; d = chi2/2",
               (1,), written_as="V[V2]"),
    TensorKind("electrogyration", "b", "eV[V2]", "m/V", "field, gyration pair", (1,)),
    TensorKind("elastic-stiffness", "c", "[[V2]2]", "Pa", "stress pair, strain pair", (1, 1)),
    TensorKind("elastic-compliance", "s", "[[V2]2]", "1/Pa", "strain pair, stress pair", (2, 2)),
    TensorKind("elasto-optic", "p", "[V2][V2]", "1", "optical pair, strain pair", (1, 1)),
    TensorKind("piezo-optic", "pi", "[V2][V2]", "1/Pa", "optical pair, stress pair", (1, 2)),
    TensorKind("electrostriction", "Q", "[V2][V2]", "m^4/C^2", "strain pair, pair of polarisations", (1, 2)),
    TensorKind("kerr", "R", "[V2][V2]", "m^2/V^2", "optical pair, pair of fields", (1, 2)),
    TensorKind("magnetoresistance", "M", "[V2][V2]", "ohm m/T^2",
               "field and current, pair of flux densities", (1, 2)),
    TensorKind("flexoelectric", "mu", "V2[V2]", "C/m",
               "polarisation, direction of the gradient, strain pair", (1,)),
    TensorKind("third-harmonic", "chi", "V[V3]", "m^2/V^2", "polarisation, three fields"),
    TensorKind("third-harmonic-kleinman", "chi", "[V4]", "m^2/V^2", "polarisation, three fields",
               written_as="V[V3]"),
    TensorKind("nonlinear-piezoelectric", "e", "V[[V2]2]", "C/m^2", "polarisation, two strain pairs", (1, 1)),
    TensorKind("third-order-elastic", "C", "[[V2]3]", "Pa", "three strain pairs (Brugger)", (1, 1, 1)),
    TensorKind("fourth-order-elastic", "C", "[[V2]4]", "Pa", "four strain pairs (Brugger)", (1, 1, 1, 1)),
    TensorKind("displacement-parameter", "U", "[V2]", "angstrom^2", _BOTH, site=True),
    TensorKind("electric-field-gradient", "V", "[V2]", "V/m^2", _BOTH, traceless=True, site=True),
    TensorKind("shielding", "sigma", "V2", "1", "induced field, applied field", site=True),
    TensorKind("born-charge", "Z", "V2", "e", "polarisation, displacement of the atom", site=True),
)  # fmt: skip


def all_kinds() -> tuple[TensorKind, ...]:
    """Every named kind, crystal properties first, then tensors of an atom's site."""
    return _KINDS


def kind(name: str) -> TensorKind:
    """The kind of a given name. Raises UsageError with near names."""
    names = {k.name: k for k in all_kinds()}
    if name not in names:
        containing = [known for known in names if name and name.lower() in known]
        near = containing or get_close_matches(name.lower(), names, n=3, cutoff=0.5)
        raise UsageError(
            "no tensor kind has this name",
            value=repr(name),
            rule="a name of the list of kinds; an index symmetry is given by its Jahn symbol",
            next_step=f"near: {', '.join(near)}" if near else f"kinds: {', '.join(sorted(names))}",
        )
    return names[name]


def kind_from_jahn(text: str) -> TensorKind:
    """A nameless kind with the index symmetry of a Jahn symbol, written without factors."""
    jahn = read_jahn(text)
    return TensorKind(
        f"jahn {jahn.text}", "T", jahn.text, "unknown", "as the Jahn symbol, from left to right"
    )
