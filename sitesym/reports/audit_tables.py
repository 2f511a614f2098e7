"""An `audit` document as CSV, Markdown and LaTeX: one row a record."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from sitesym.reports.audit_phrases import Entry, action_text, percent, slip_text
from sitesym.reports.audit_text import summary_text
from sitesym.reports.headings import latex_footer, markdown_footer
from sitesym.reports.markup import (
    Document,
    csv_text,
    latex_escape,
    latex_table,
    markdown_escape,
    markdown_table,
)

CSV_COLUMNS = (
    "id", "verdict", "cause", "quantity", "group", "stated_axes", "stated_relative_residual", "stated_chi2",
    "stated_dof", "stated_p_value", "best_axes", "best_order", "best_layout", "best_factor", "best_slip",
    "best_relative_residual", "rivals", "cannot_tell", "forbidden", "relations", "index_symmetry_holds",
    "tensor_symmetry", "stability", "finding", "action", "warnings", "place", "error_code", "error_message",
)  # fmt: skip
_SHOWN = (
    "id", "quantity", "group", "verdict", "residual as stated", "best reading", "its residual", "cannot tell",
    "what to do",
)  # fmt: skip


def audit_csv(document: Document) -> str:
    """Every record with what it states, the best reading and the counts of findings."""
    return csv_text(CSV_COLUMNS, map(_csv_row, document["records"]))


def audit_markdown(document: Document) -> str:
    """The table of records, cross-checks and the summary."""
    blocks = ["# Audit", markdown_escape(summary_text(document)), markdown_table(_SHOWN, _shown(document))]
    if document["cross_checks"]:
        blocks.extend(["## Quantities of one crystal", markdown_table(*_crossed(document))])
    return "\n\n".join([*blocks, markdown_footer(document)])


def audit_latex(document: Document) -> str:
    """The same as tabulars."""
    blocks = [latex_table(_SHOWN, _shown(document))]
    if document["cross_checks"]:
        blocks.append(latex_table(*_crossed(document)))
    return "\n\n".join([*blocks, latex_escape(summary_text(document)), latex_footer(document)])


def _csv_row(one: Entry) -> list[object]:
    stated, best, error = (one[name] or {} for name in ("stated", "best", "error"))
    finding, action = (*one["message"], None, None)[:2]
    slip, index = best.get("slip") or {}, one["index_symmetry"] or {}
    symmetry, stability = one["tensor_symmetry"] or {}, one["stability"] or {}
    return [
        one["id"],
        one["verdict"],
        one["cause"],
        one["quantity"],
        one["group"],
        stated.get("axes"),
        *(stated.get(name) for name in ("relative_residual", "chi2", "dof", "p_value")),
        *(best.get(name) for name in ("axes", "order", "layout", "factor")),
        f"{slip['sort']} {' '.join(slip['entries'])}" if slip else None,
        best.get("relative_residual"),
        len(one["rivals"]),
        "; ".join(ambiguity["reading"] for ambiguity in one["cannot_tell"]) or None,
        len(one["forbidden"]),
        len(one["relations"]),
        index.get("holds"),
        symmetry.get("symbol"),
        stability.get("answer"),
        finding,
        action,
        "; ".join(one["warnings"]) or None,
        one["place"],
        error.get("code"),
        _error_text(error) if error else None,
    ]


def _error_text(error: dict[str, Any]) -> str:
    labelled = (("value", "value"), ("rule", "rule"), ("next step", "next_step"))
    return "; ".join([error["what"], *(f"{label}: {error[name]}" for label, name in labelled if error[name])])


def _shown(document: Document) -> Iterator[list[object]]:
    for one in document["records"]:
        stated, best = one["stated"] or {}, one["best"]
        yield [
            one["id"],
            one["quantity"],
            one["group"],
            one["verdict"] or "error",
            percent(stated.get("relative_residual")),
            _best_text(one),
            percent(best["relative_residual"]) if best else None,
            _cannot_tell(one),
            "; ".join([action_text(one) if one["message"] else _error_text(one["error"]), *one["warnings"]]),
        ]


def _best_text(one: Entry) -> str | None:
    """The best reading in words, the order where it is another than stated."""
    best, stated = one["best"], one["stated"]
    if best is None or (one["verdict"] == "consistent" and stated is not None):
        return None if best is None else "as stated"
    parts = [f"axes {best['axes']}"]
    if stated is None or best["order"] != stated["order"]:
        parts.append(f"order {best['order']}")
    if stated is None or best["layout"] != stated["layout"]:
        parts.append(f"layout {best['layout']}")
    parts.extend([best["factor"] or "", slip_text(best["slip"]) if best["slip"] else ""])
    return "; ".join(filter(None, parts))


def _cannot_tell(one: Entry) -> str | None:
    """The sorts of ambiguity, each with its first reading."""
    first = {ambiguity["sort"]: ambiguity["reading"] for ambiguity in reversed(one["cannot_tell"])}
    return "; ".join(reversed(first.values())) or None


def _crossed(document: Document) -> tuple[tuple[str, ...], list[list[object]]]:
    head = ("relation", "records", "holds", "difference", "worst entry")
    return head, [
        [
            check["relation"],
            ", ".join(check["records"]),
            check["holds"],
            percent(check["relative_difference"]),
            check["worst_entry"],
        ]
        for check in document["cross_checks"]
    ]
