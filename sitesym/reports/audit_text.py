"""An `audit` document as plain text: for each record the verdict, what to do, then the evidence."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from sitesym.reports.audit_phrases import (
    MOST_ITEMS,
    SETTLED,
    Entry,
    action_text,
    ambiguity_lines,
    index_text,
    percent,
    reading_text,
    short,
    stability_answer,
    stated_text,
    symmetry_text,
)
from sitesym.reports.audit_stability import stability_text
from sitesym.reports.headings import footer
from sitesym.reports.layout import TEXT_WIDTH, cell_text, labelled, paragraph, table, vector_text
from sitesym.reports.markup import Document

_LABEL = 13


def audit_text(document: Document) -> str:
    """The records, the cross-checks, the summary; a single record and one to act on with all its evidence."""
    records = document["records"]
    blocks = [record_text(one, len(records) == 1 or _is_open(one)) for one in records]
    if document["cross_checks"]:
        blocks.append(cross_checks_text(document["cross_checks"]))
    closing = [_line("summary", summary_text(document)), _line("tolerances", _tolerances(document))]
    chosen = [f"{name} {_shown(value)}" for name, value in document["reading"].items() if value]
    closing.extend([_line("reading", "; ".join(chosen))] if chosen else [])
    blocks.append("\n".join(closing))
    blocks.append(footer(document))
    return "\n\n".join(blocks) + "\n"


def record_text(one: Entry, with_evidence: bool) -> str:
    """First line the verdict, second line what to do, then the evidence."""
    lines = list(headline(one))
    lines.extend(_line("warning", warning) for warning in one["warnings"])
    if with_evidence and one["verdict"] is not None:
        lines.extend(_evidence(one))
    lines.extend(_line("remark", remark) for remark in one["remarks"])
    return "\n".join(lines)


def headline(one: Entry) -> Iterator[str]:
    """The two lines that matter; of an error what happened and the next step."""
    name = cell_text(one["id"])
    if one["error"] is not None:
        error = one["error"]
        value = f": {cell_text(error['value'])}" if error["value"] else ""
        yield paragraph(f"{name}: error: {error['what']}{value} ({one['place']})")
        yield paragraph(f"do: {error['next_step'] or error['rule'] or 'see the message'}", indent=2)
        return
    yield paragraph(f"{name}: {one['message'][0]}")
    yield paragraph(f"do: {action_text(one)}", indent=2)


def _is_open(one: Entry) -> bool:
    """Whether something is to be done: of many records these come with their evidence."""
    return one["verdict"] not in SETTLED or bool(stability_answer(one))


def _evidence(one: Entry) -> Iterator[str]:
    yield _line("crystal", _crystal_text(one))
    yield _line("tensor", _tensor_text(one))
    yield _line("index", index_text(one["index_symmetry"]))
    if one["stated"] is not None:
        yield _line("as stated", stated_text(one["stated"]))
    yield from _deviations("forbidden", one["forbidden"])
    yield from _deviations("relations", one["relations"])
    if one["best"] is not None:
        as_stated = one["verdict"] == "consistent" and one["stated"] is not None
        if not as_stated:
            yield _line("best reading", reading_text(one["best"]))
        yield _line("axes" if as_stated else "its axes", _rows(one["best"]["rotation"]))
    for rival in _rivals(one):
        yield _line("rival", reading_text(rival))
    if one["cannot_tell"]:
        yield _line("cannot tell", "\n".join(ambiguity_lines(one["cannot_tell"])))
    if one["tensor_symmetry"] is not None:
        yield _line("tensor has", symmetry_text(one["tensor_symmetry"], vanishes=not one["independent"]))
    if one["stability"] is not None:
        is_compliance = one["quantity"] == "elastic-compliance"
        yield stability_text(one["stability"], one["measurement"]["unit"], is_compliance, 2 + _LABEL)


def _rivals(one: Entry) -> Sequence[Entry]:
    """Rivals worth a line; where nothing decides, those in the same axes stand under what it cannot tell."""
    rivals: Sequence[Entry] = one["rivals"][:MOST_ITEMS]
    if one["verdict"] != "cannot-tell":
        return rivals
    return [rival for rival in rivals if rival["axes"] != one["best"]["axes"]]


def _shown(value: object) -> str:
    return ", ".join(value) if isinstance(value, list) else str(value)


def _line(label: str, text: str) -> str:
    return labelled(f"  {label}", text, width=TEXT_WIDTH, label_width=_LABEL + 2)


def _crystal_text(one: Entry) -> str:
    crystal = one["crystal"]
    parts = [crystal["formula"], crystal["space_group"], f"point group {one['group']}"]
    parts.extend([crystal["reference"], crystal["part"]])
    frame = f"file axes: {crystal['frame'] or 'those of the symbol'}"
    return "\n".join([", ".join(filter(None, parts)), frame, *crystal["remarks"]])


def _tensor_text(one: Entry) -> str:
    """What the record says of itself."""
    told = one["measurement"]
    axes = told["axes"] if isinstance(told["axes"], str) else "a matrix"
    parts = [f"{one['quantity']} {told['symbol']}", f"unit {told['unit']}", f"axes {axes}"]
    if told["layout"] != "full":
        parts.append(f"order {told['order']}")
    parts.append(f"layout {told['layout']}")
    parts.extend(f"{name} {told[name]}" for name in ("conditions", "source") if told[name])
    parts.append(f"{one['independent']} independent components, {one['constraints']} constraints")
    return "; ".join(parts)


def _deviations(label: str, deviations: Sequence[Entry]) -> Iterator[str]:
    if not deviations:
        return
    rows = []
    for one in deviations[:MOST_ITEMS]:
        said = one["relation"] or f"{one['component']} = 0"
        rows.append((said, *(short(one[name]) for name in ("value", "expected", "tolerance"))))
    more = len(deviations) - len(rows)
    drawn = table((label, "value", "expected", "tolerance"), rows, indent=2 + _LABEL)
    yield drawn + (f"\n{' ' * (2 + _LABEL)}and {more} more" if more else "")


def _rows(rotation: Sequence[Sequence[float]]) -> str:
    first, *rest = (f"{name} = {vector_text(row)}" for name, row in zip("xyz", rotation, strict=True))
    return "\n".join([f"{first}  in the file's Cartesian axes", *rest])


def cross_checks_text(checks: Sequence[Entry]) -> str:
    """One row a relation between records of one crystal."""
    head = ("relation", "records", "holds", "difference", "worst entry", "of tolerance")
    rows = []
    for check in checks:
        records = ", ".join(map(cell_text, check["records"]))
        difference, share = percent(check["relative_difference"]), short(check["share_of_tolerance"])
        rows.append((check["relation"], records, check["holds"], difference, check["worst_entry"], share))
    basis = "; ".join(dict.fromkeys(check["basis"] for check in checks))
    blocks = ["quantities of one crystal", table(head, rows, indent=2)]
    return "\n".join([*blocks, paragraph(f"tolerance: {basis}", indent=2)])


def summary_text(document: Document) -> str:
    """Counts, and what the stated axes alone would have said."""
    summary = document["summary"]
    counted = ", ".join(f"{number} {verdict}" for verdict, number in summary["verdicts"].items() if number)
    errors = f"{summary['errors']} with errors" if summary["errors"] else ""
    violating = summary["violating_in_stated_axes_alone"]
    alone = f"in the stated axes alone {violating} would have been called violating"
    unknown = summary["axes_or_order_not_stated"]
    missing = f"{unknown} state no axes or no order" if unknown else ""
    failing = summary["cross_checks_failing"]
    crossed = f"{failing} of {summary['cross_checks']} cross-checks fail" if summary["cross_checks"] else ""
    count = f"{summary['records']} record{'' if summary['records'] == 1 else 's'}"
    head = f"{count}: {', '.join(filter(None, (counted, errors)))}"
    lost = len(document["unread_files"])
    unread = f"{lost} file{'' if lost == 1 else 's'} could not be read" if lost else ""
    return "; ".join(filter(None, (head, alone, missing, crossed, unread)))


def _tolerances(document: Document) -> str:
    return (
        f"noise {percent(document['noise'])} of a tensor where no uncertainty (sigma) is stated; "
        f"{document['tolerance_angstrom']:g} angstrom for the symmetry of crystals"
    )
