"""What an audit answers: frozen results, no computing."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

from sitesym.arrays import FloatArray
from sitesym.audit.measurement import Layout, Measurement
from sitesym.audit.orders import Order
from sitesym.groups import PointGroup

Verdict: TypeAlias = Literal["consistent", "consistent-otherwise", "violates", "cannot-tell", "no-constraint"]
VERDICTS: Final = ("consistent", "consistent-otherwise", "violates", "cannot-tell", "no-constraint")

Cause: TypeAlias = Literal["", "reading", "slip", "crystal", "index-symmetry", "unexplained", "not-searched"]


@dataclass(frozen=True)
class Residual:
    """How far a tensor is from the allowed form, in the orthonormal metric of the full tensor.

    ``absolute``: norm of the forbidden part, in the unit of the tensor. ``relative``: divided by the norm of
    the tensor. ``tolerance``: what noise and rounding allow, in the unit of the tensor. ``chi2``, ``dof``,
    ``p_value``: of the best allowed tensor, where standard uncertainties are known, else None.
    ``within``: whether the tensor counts as obeying.
    """

    absolute: float
    relative: float
    tolerance: float
    within: bool
    chi2: float | None = None
    dof: int | None = None
    p_value: float | None = None


@dataclass(frozen=True)
class EntryPair:
    """Two entries that index symmetry makes equal or opposite; ``tolerance`` of their difference."""

    first: str
    second: str
    first_value: float
    second_value: float
    tolerance: float


@dataclass(frozen=True)
class IndexFinding:
    """Index symmetry of the array as given: C_IJ against C_JI, eps_ij against eps_ji.

    ``applies``: whether the layout leaves anything to compare. ``largest``: largest difference of two
    entries, in the unit of the tensor. ``relative``: norm of the part that breaks it divided by the norm of
    the array. ``broken``: the pairs beyond their tolerance.
    """

    applies: bool
    holds: bool
    largest: float
    relative: float
    broken: tuple[EntryPair, ...] = ()


@dataclass(frozen=True)
class Deviation:
    """A component that is not what symmetry says, in the stated axes.

    ``component``: contracted name, such as 14. ``expected``: zero for a forbidden one, else what ``relation``
    (such as ``26 = -2*11``) gives from the other entries. All in the unit and with the factors of the kind.
    """

    component: str
    value: float
    expected: float
    tolerance: float
    relation: str = ""


@dataclass(frozen=True)
class Slip:
    """A mistake in single entries that would explain a violation.

    ``sort``: sign, swap, power-of-ten or entry. ``entries``: names of the entries concerned. ``exponent``: of
    the power of ten by which the entry is too large. ``expected``: the value each entry should have.
    """

    sort: Literal["sign", "swap", "power-of-ten", "entry"]
    entries: tuple[str, ...]
    expected: tuple[float, ...]
    exponent: int = 0


@dataclass(frozen=True, eq=False)
class Turn:
    """A rotation in words: angle in degrees, unit axis in the file's axes (3,), nearest crystal directions.

    ``nearest``: for each of the tensor's x, y, z: lattice direction and angle to it in degrees.
    """

    angle_degrees: float
    axis: FloatArray
    nearest: tuple[tuple[str, float], ...]


@dataclass(frozen=True, eq=False)
class Reading:
    """One way to read the array, and how well the tensor then obeys.

    ``axes``: name of the axes with the turn that was applied to them. ``rotation``: (3, 3), the axes of the
    tensor as rows in the file's axes. ``factor``: what the entries were divided by, in words ('' for the
    kind's own factors). ``choices``: how many hypotheses of this richness were tried. ``score``: natural
    logarithm of the number of them expected to fit so well by chance; low is good. ``joined``: other
    readings that give the same tensor up to an equivalent choice of axes. ``slip``: the mistake that has to
    be put right besides.
    """

    axes: str
    rotation: FloatArray
    order: Order
    layout: Layout
    factor: str
    residual: Residual
    choices: int
    score: float
    joined: tuple[str, ...] = ()
    slip: Slip | None = None
    turn: Turn | None = None

    @property
    def words(self) -> str:
        """The reading in one phrase."""
        parts = [f"axes {self.axes}", f"order {' '.join(self.order)}", f"layout {self.layout}"]
        return ", ".join(parts + ([self.factor] if self.factor else []))


@dataclass(frozen=True)
class EquivalentAxes:
    """A turn of the axes, a change of hand, or both, that symmetry cannot detect, in the axes of the reading.

    ``turn``: in words. ``flips``: independent components that change sign. ``mixes``: whether it does more to
    the components than change signs.
    """

    turn: str
    flips: tuple[str, ...]
    mixes: bool


AmbiguitySort: TypeAlias = Literal["order", "layout", "factor", "axes", "hand", "entry"]


@dataclass(frozen=True, eq=False)
class Ambiguity:
    """Another way to read the array, which gives another tensor that obeys as well: symmetry cannot tell.

    ``sort``: what is read otherwise: the order of the pairs, the layout, the factors, the axes, their hand,
    or single entries. ``reading``: in words. ``rotation`` (3, 3), ``order``, ``layout``, ``factor``: of the
    other reading, as in `Reading`; all as found for a sort of ``entry``. ``any_angle``: whether every angle
    about the axis of the turn will do, ``rotation`` being one of them. ``flips``: entries that change sign,
    for a turn or a change of hand that does nothing else; ``mixes``: whether it does more. ``entries``: names
    of the entries that stand in no relation to others, each alone free in size and sign.
    """

    sort: AmbiguitySort
    reading: str
    rotation: FloatArray
    order: Order
    layout: Layout
    factor: str
    any_angle: bool = False
    flips: tuple[str, ...] = ()
    mixes: bool = False
    entries: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class TensorSymmetry:
    """The largest point group that leaves the tensor unchanged within noise, as far as it was searched.

    ``symbol``, ``system``, ``elements`` (names): of that group. ``crystal_symbol``: the group that a tensor
    of this kind shows in this crystal. ``relation``: of the first to the second: same, higher (more than the
    crystal asks for), lower (a subgroup), other. ``axes``: in which the operations were sought: ``ieee`` axes
    of the crystal, or ``own`` ones of the tensor, wherever they lie; there groups are compared whatever their
    orientation. ``rotation`` (3, 3): these axes as rows in the file's axes.
    """

    symbol: str
    system: str
    elements: tuple[str, ...]
    crystal_symbol: str
    relation: Literal["same", "higher", "lower", "other"]
    axes: Literal["ieee", "own"]
    rotation: FloatArray


@dataclass(frozen=True, eq=False)
class AuditResult:
    """The answer for one measurement.

    ``stated``: the reading as stated (None where order or axes are unknown). ``best``: the reading that
    explains the tensor, or the slip; None when nothing does. ``rivals``: others that do about as well.
    ``cause``: what the verdict is put down to: another reading, a slip, a crystal of another class, broken
    index symmetry, nothing found, no search asked for, or '' where nothing is wrong. ``equivalent_axes``:
    changes of axes that no tensor of the kind can show in this class. ``cannot_tell``: everything that gives
    another tensor than the reading the verdict rests on and obeys as well; empty where nothing obeys.
    ``message``: two lines, the verdict and what to do.
    """

    measurement: Measurement
    group: PointGroup
    noise: float
    verdict: Verdict
    message: str
    index_symmetry: IndexFinding
    cause: Cause = ""
    stated: Reading | None = None
    best: Reading | None = None
    rivals: tuple[Reading, ...] = ()
    forbidden: tuple[Deviation, ...] = ()
    relations: tuple[Deviation, ...] = ()
    equivalent_axes: tuple[EquivalentAxes, ...] = ()
    cannot_tell: tuple[Ambiguity, ...] = ()
    tensor_symmetry: TensorSymmetry | None = None
    constraints: int = 0
    independent: int = 0
