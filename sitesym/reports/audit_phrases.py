"""Parts of an `audit` document in words: readings, residuals, index symmetry, slips, turns."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from itertools import groupby
from typing import Any

from sitesym.reports.layout import vector_text

#: A part of a document.
Entry = Mapping[str, Any]

#: Longest lists in a text; JSON has all of them.
MOST_ITEMS = 12
_FEW = 2
#: Verdicts about which nothing is to be done.
SETTLED = ("consistent", "no-constraint")
_ROUNDING = 1e-12


def index_text(index: Entry) -> str:
    """Whether entries that index symmetry makes equal are so."""
    if not index["applies"]:
        return "every component is written once: no pair of entries to compare"
    if index["holds"]:
        return f"index symmetry holds: the largest difference of two entries is {short(index['largest'])}"
    pairs = []
    for pair in index["broken"]:
        first = f"{pair['first']} = {short(pair['first_value'])}"
        pairs.append(f"{first} but {pair['second']} = {short(pair['second_value'])}")
    return f"index symmetry is broken by {percent(index['relative'])}: {cut(pairs)}"


def stated_text(stated: Entry) -> str:
    """The residual in the axes and order as stated."""
    judged = "within" if stated["within"] else "beyond"
    absolute = stated["absolute_residual"] if (stated["relative_residual"] or 0.0) > _ROUNDING else 0.0
    text = (
        f"axes {stated['axes']}, order {stated['order']}: residual {short(absolute)} "
        f"({percent(stated['relative_residual'])}), {judged} the tolerance {short(stated['tolerance'])}"
    )
    if stated["chi2"] is None:
        return text
    chance = (
        f"chi2 {short(stated['chi2'])} with {stated['dof']} degrees of freedom, p {short(stated['p_value'])}"
    )
    return f"{text}; {chance}"


def reading_text(reading: Entry) -> str:
    """Axes, order, layout, factors, slip, residual."""
    parts = [f"axes {reading['axes']}", f"order {reading['order']}", f"layout {reading['layout']}"]
    parts.append(reading["factor"] or "")
    parts.append(slip_text(reading["slip"]) if reading["slip"] else "")
    parts.append(turn_text(reading["turn"]) if reading["turn"] else "")
    parts.append(f"residual {percent(reading['relative_residual'])}")
    if reading["equal_to"]:
        parts.append(f"up to equivalent axes the same as {cut(reading['equal_to'], _FEW)}")
    return "; ".join(filter(None, parts))


def slip_text(slip: Entry) -> str:
    """A mistake in single entries, and what would be right."""
    entries, expected = " and ".join(slip["entries"]), ", ".join(map(short, slip["expected"]))
    words = {
        "sign": f"sign of {entries} reversed",
        "swap": f"{entries} exchanged",
        "power-of-ten": f"{entries} off by 10^{slip['exponent']}",
        "entry": f"{entries} wrong",
    }
    return f"slip: {words[slip['sort']]}, expected {expected}"


def turn_text(turn: Entry) -> str:
    """A free rotation: angle, axis, and the crystal directions next to the tensor's axes."""
    nearest = ", ".join(
        f"{axis} {round(one['degrees'], 2):g} degrees from {one['direction']}"
        for axis, one in zip("xyz", turn["nearest"], strict=False)
    )
    axis = vector_text(turn["axis"], 4)
    words = f"turned by {turn['angle_degrees']:.2f} degrees about {axis} of the file's axes"
    return f"{words} ({nearest})" if nearest else words


def symmetry_text(symmetry: Entry, vanishes: bool = False) -> str:
    """The tensor's own symmetry beside that of the crystal, and where it was sought; ``vanishes``: whether
    the crystal forbids such a tensor altogether.
    """
    asked = f"the {symmetry['crystal_symbol']} that such a tensor shows in this crystal"
    words = {
        "same": f"the same as {asked}",
        "higher": f"more than {asked}",
        "lower": f"less than {asked}: another phase, poling, strain, noise or other axes",
        "other": f"neither a subgroup nor a supergroup of {asked}",
    }
    own = f"symmetry {symmetry['symbol']} ({symmetry['system']}) within the noise"
    related = "in this crystal such a tensor must vanish" if vanishes else words[symmetry["relation"]]
    if symmetry["axes"] == "ieee":
        return f"{own}, sought in the ieee axes of the crystal; {related}"
    named = zip("xyz", symmetry["rotation"], strict=True)
    rows = ", ".join(f"{name} = {vector_text(row, 4)}" for name, row in named)
    return f"{own}, in axes of its own; {related}\n{rows} in the file's Cartesian axes"


def ambiguity_lines(ambiguities: Sequence[Entry]) -> Iterator[str]:
    """What symmetry cannot tell, one line a sort; a turn of axes with what it does to the components."""
    yield "read in one of these ways the array is another tensor, which obeys as well:"
    for sort, alike in groupby(ambiguities, key=lambda one: (one["sort"], bool(one.get("mixes")))):
        effect = " (components change places or mix)" if sort[1] else ""
        yield f"{sort[0]}: {cut([_ambiguity_text(one) for one in alike])}{effect}"


def _ambiguity_text(one: Entry) -> str:
    if one["sort"] == "entry":
        return f"{', '.join(one['entries'])}, in no relation to other entries: any size and sign"
    said: str = one["reading"].removeprefix(f"{one['sort']} ")
    return f"{said} reverses {', '.join(one['flips'])}" if one.get("flips") else said


def action_text(one: Entry) -> str:
    """What to do about the symmetry, and about the stability where that speaks up."""
    _, *told = one["message"]
    answer = stability_answer(one)
    if not answer:
        return " ".join(told)
    unstable = f"elastically {answer}: see the conditions before using it"
    return f"{unstable}; symmetry asks for nothing" if one["verdict"] in SETTLED else f"{told[0]}; {unstable}"


def stability_answer(one: Entry) -> str:
    """'unstable' or 'unreliable'; empty where nothing speaks against stability."""
    answer = "" if one["stability"] is None else str(one["stability"]["answer"])
    return "" if answer == "stable" else answer


def cut(items: Sequence[str], most: int = MOST_ITEMS) -> str:
    """A list with its tail left out where it is long.

    >>> cut(["a", "b", "c"], 2)
    'a; b and 1 more'
    """
    more = f" and {len(items) - most} more" if len(items) > most else ""
    return "; ".join(items[:most]) + more


def percent(value: float | None) -> str:
    """A fraction with three digits; what is only rounding of the computer's numbers is zero.

    >>> percent(0.01234), percent(2e-16), percent(None)
    ('1.23 %', '0 %', '-')
    """
    return "-" if value is None else f"{100 * value if abs(value) > _ROUNDING else 0:.3g} %"


def short(value: float | None) -> str:
    """A number with four digits, a dash for none."""
    return "-" if value is None else f"{value:.4g}"
