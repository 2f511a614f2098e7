"""From a document to text in one of the formats; which function does it stands in one table."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Final

from sitesym.errors import UsageError
from sitesym.reports import (
    allowed_tables,
    allowed_text,
    audit_tables,
    audit_text,
    conventions,
    irreps_latex,
    irreps_report,
    screen_report,
    sites_report,
)
from sitesym.reports.markup import Document, json_text

FORMATS: Final = ("text", "json", "csv", "markdown", "latex")

_RENDERERS: Final[Mapping[str, Mapping[str, Callable[[Document], str]]]] = {
    "sitesym.allowed/1": {
        "text": allowed_text.allowed_text,
        "csv": allowed_tables.allowed_csv,
        "markdown": allowed_tables.allowed_markdown,
        "latex": allowed_tables.allowed_latex,
    },
    "sitesym.irreps/1": {
        "text": irreps_report.irreps_text,
        "csv": irreps_report.irreps_csv,
        "markdown": irreps_report.irreps_markdown,
        "latex": irreps_latex.irreps_latex,
    },
    "sitesym.sites/1": {
        "text": sites_report.sites_text,
        "csv": sites_report.sites_csv,
        "markdown": sites_report.sites_markdown,
        "latex": sites_report.sites_latex,
    },
    "sitesym.screen/1": {
        "text": screen_report.screen_text,
        "csv": screen_report.screen_csv,
        "markdown": screen_report.screen_markdown,
        "latex": screen_report.screen_latex,
    },
    "sitesym.audit/1": {
        "text": audit_text.audit_text,
        "csv": audit_tables.audit_csv,
        "markdown": audit_tables.audit_markdown,
        "latex": audit_tables.audit_latex,
    },
    "sitesym.conventions/1": {
        "text": conventions.conventions_text,
        "csv": conventions.conventions_csv,
        "markdown": conventions.conventions_markdown,
        "latex": conventions.conventions_latex,
    },
}


def render(document: Document, format_name: str) -> str:
    """The document in one of `FORMATS`, ending in a newline.

    Raises
    ------
    UsageError
        The format or the document's schema is not known.
    """
    if format_name == "json":
        return json_text(document)
    renderers = _RENDERERS.get(document["schema"])
    if renderers is None or format_name not in renderers:
        raise UsageError(
            "this document cannot be written in this format",
            f"{document['schema']} as {format_name}",
            f"formats are {', '.join(FORMATS)}; schemas are {', '.join(_RENDERERS)}",
            "choose one of these formats",
        )
    return renderers[format_name](document)
