"""Files of measurements to raw records: JSON, JSON Lines, CSV and YAML.

A record is a mapping of field names to what stands in the file; numbers keep their printed text. A record
that cannot be parsed carries its error, so that the others of the file can go on; a file that cannot be read
at all is an error of its own.
"""

from __future__ import annotations

import csv
import io
import json
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from itertools import dropwhile
from pathlib import Path
from typing import Any, Final

from sitesym.audit.printed import PrintedNumber
from sitesym.errors import SitesymError, TensorInputError, UnknownFormatError

#: Field names to values as they stand in the file.
Fields = Mapping[str, Any]

#: Columns of a CSV with one row a component.
_COMPONENT_COLUMNS: Final = ("component", "value")
_COMMENT: Final = "#"


@dataclass(frozen=True, eq=False)
class RawRecord:
    """One record as it stands in a file, or the error that stands in its place.

    ``place`` says where: "a.jsonl, line 3". ``folder``: paths in the record are relative to it.
    """

    place: str
    folder: Path
    fields: Fields
    error: SitesymError | None = None


def read_records(path: str | Path) -> tuple[RawRecord, ...]:
    """All records of a file, in its order; one that is not understood carries its error.

    Raises TensorInputError, or UnknownFormatError, for a file that cannot be read at all or holds no record.
    """
    location = Path(path)
    try:
        text = location.read_text(encoding="utf-8-sig")
        records = tuple(_parser(location, text)(text))
    except OSError as error:
        raise _unreadable(error.strerror or str(error)).in_file(str(location)) from error
    except UnicodeDecodeError as error:
        raise _unreadable(f"byte {error.start} is not UTF-8").in_file(str(location)) from error
    except RecursionError as error:
        raise _unreadable("brackets are nested too deeply").in_file(str(location)) from error
    except SitesymError as error:
        raise error.in_file(str(location)) from error
    if not records:
        raise _empty("the file holds no record").in_file(str(location))
    return tuple(_placed(location, place, content) for place, content in records)


_Parsed = Iterator[tuple[str, "Fields | SitesymError"]]


def _placed(location: Path, place: str, content: Fields | SitesymError) -> RawRecord:
    name = ", ".join(filter(None, (location.name, place)))
    if isinstance(content, SitesymError):
        return RawRecord(name, location.parent, {}, content.in_file(str(location)))
    return RawRecord(name, location.parent, content)


def _parser(location: Path, text: str) -> Callable[[str], _Parsed]:
    """The parser for a file's name or, for a name that tells nothing, its first character."""
    parsers: dict[str, Callable[[str], _Parsed]] = {
        ".json": _json,
        ".jsonl": _json_lines,
        ".ndjson": _json_lines,
        ".csv": _csv,
        ".yaml": _yaml,
        ".yml": _yaml,
    }
    if not text.strip():
        raise _empty("the file is empty")
    suffix = location.suffix.lower()
    if suffix in parsers:
        return parsers[suffix]
    if text.lstrip()[0] in "[{":
        return _json
    raise UnknownFormatError(
        "the format of the measurements is not known",
        location.name,
        f"a file name ending in {', '.join(parsers)}, or text that starts as JSON",
        "rename the file",
    )


def _json(text: str) -> _Parsed:
    """One record, a list of records, or a mapping with a list under ``records``."""
    try:
        content = _json_value(text)
    except json.JSONDecodeError as error:
        if _json_object(text.splitlines()[0]):
            yield from _json_lines(text)
            return
        raise _not_parsed("JSON", f"line {error.lineno}: {error.msg}") from error
    yield from _listed(content)


def _json_lines(text: str) -> _Parsed:
    """One record a line; blank lines count for nothing."""
    for number, line in enumerate(text.splitlines(), start=1):
        if line.strip():
            try:
                yield f"line {number}", _mapping(_json_value(line))
            except json.JSONDecodeError as error:
                yield f"line {number}", _not_parsed("JSON", f"column {error.colno}: {error.msg}")
            except TensorInputError as error:
                yield f"line {number}", error


def _json_value(text: str) -> Any:
    return json.loads(text, parse_float=PrintedNumber, parse_int=PrintedNumber)


def _json_object(line: str) -> bool:
    """Whether a line alone is a record: JSON Lines under another name."""
    try:
        return isinstance(json.loads(line), dict)
    except json.JSONDecodeError:
        return False


def _yaml(text: str) -> _Parsed:
    """One document or several, each a record, a list of records, or a mapping with ``records``."""
    import yaml

    # A class of its own, so that the numbers of other users of yaml stay plain.
    loader_class: Any = type("PrintedNumberLoader", (yaml.SafeLoader,), {})

    def number(loader: Any, node: Any) -> Any:
        scalar = str(loader.construct_scalar(node)).replace("_", "")
        try:
            return PrintedNumber(scalar)
        except ValueError:
            plain = loader.construct_yaml_float if node.tag.endswith("float") else loader.construct_yaml_int
            return plain(node)

    for tag in ("float", "int"):
        loader_class.add_constructor(f"tag:yaml.org,2002:{tag}", number)
    try:
        documents = [content for content in yaml.load_all(text, loader_class) if content is not None]
    except yaml.YAMLError as error:
        raise _not_parsed("YAML", " ".join(str(error).split())) from error
    for content in documents:
        yield from _listed(content)


def _listed(content: Any) -> _Parsed:
    if isinstance(content, dict) and isinstance(content.get("records"), list):
        content = content["records"]
    entries = content if isinstance(content, list) else [content]
    for number, entry in enumerate(entries, start=1):
        try:
            yield f"record {number}" if len(entries) > 1 else "", _mapping(entry)
        except TensorInputError as error:
            yield f"record {number}", error


def _mapping(entry: Any) -> Fields:
    if isinstance(entry, dict):
        return {str(key): value for key, value in entry.items()}
    raise TensorInputError(
        "a record is not a set of named fields",
        f"{type(entry).__name__}: {str(entry)[:60]}",
        'fields such as {"id": ..., "crystal": ..., "quantity": ..., "values": ...}',
        "write each record as an object",
    )


def _csv(text: str) -> _Parsed:
    """One row a record (column ``values``), or one row a component (columns ``component`` and ``value``).

    Lines before the head that start with # count for nothing.
    """
    lines = dropwhile(lambda line: line.lstrip().startswith(_COMMENT), text.splitlines(keepends=True))
    rows = csv.DictReader(io.StringIO("".join(lines), newline=""), skipinitialspace=True, strict=True)
    try:
        names = [name.strip() for name in rows.fieldnames or ()]
        content = [
            {key.strip(): value for key, value in row.items() if key is not None and value not in (None, "")}
            for row in rows
        ]
    except csv.Error as error:
        raise _not_parsed("CSV", f"line {rows.line_num}: {error}") from error
    if all(column in names for column in _COMPONENT_COLUMNS):
        yield from _component_records(content)
    elif "values" in names:
        yield from ((f"row {number}", row) for number, row in enumerate(content, start=1))
    else:
        raise TensorInputError(
            "the columns do not say where the values stand",
            ", ".join(names),
            "a column values (a matrix a row), or columns component and value (a component a row)",
            "name the columns in the first line",
        )


def _component_records(rows: Iterable[dict[str, Any]]) -> _Parsed:
    """Rows joined by id and quantity, in the order of their first rows; other columns from the first row that
    has them.
    """
    joined: dict[tuple[str, str], dict[str, Any]] = {}
    for row in rows:
        key = str(row.get("id", "")), str(row.get("quantity", ""))
        record = joined.setdefault(key, {"components": {}})
        listed = record["components"].setdefault(str(row.get("component", "")), [])
        listed.append((row.get("value"), row.get("sigma")))
        for name, value in row.items():
            if name not in (*_COMPONENT_COLUMNS, "sigma"):
                record.setdefault(name, value)
    yield from ((f"id {identity}" if identity else "", fields) for (identity, _), fields in joined.items())


def _unreadable(reason: str) -> TensorInputError:
    return TensorInputError(
        "the file of measurements cannot be read", reason, "a text file in UTF-8", "look at the path"
    )


def _empty(what: str) -> TensorInputError:
    return TensorInputError(what, "", "at least one record", "give a file with a measurement in it")


def _not_parsed(language: str, reason: str) -> TensorInputError:
    return TensorInputError(
        f"the text is not {language}", reason, f"well-formed {language}", "correct the text at this place"
    )
