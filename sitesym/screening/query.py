"""Questions to a table of rows: conditions, order, columns. A user's text never becomes part of SQL: columns
are looked up in the list of columns, operators in a table, and values are bound as parameters.

A condition is ``column operator value``, for example ``atoms <= 20``, ``point_group = -1``, ``polar = yes``,
``id ~ oxide`` (contains), ``error_code = none`` (missing). A missing value meets no other condition.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final, TypeAlias

from sitesym.errors import UsageError
from sitesym.screening.columns import Column

Value: TypeAlias = str | int | float | bool | None

#: Operators, and the SQL they stand for between a column and a parameter.
OPERATORS: Final = {"=": "=", "==": "=", "!=": "<>", "<": "<", "<=": "<=", ">": ">", ">=": ">=", "~": ""}

_CONDITION = re.compile(r"\s*(\w+)\s*(!=|<=|>=|==|=|<|>|~)\s*(.*?)\s*", re.DOTALL)
_TRUTH: Final = {"yes": True, "true": True, "1": True, "no": False, "false": False, "0": False}
_MISSING: Final = "none"
#: The largest integer of SQLite; no table has more rows.
_MOST: Final = 2**63 - 1


@dataclass(frozen=True)
class Condition:
    """What a value of a column must meet; ``value`` None stands for a missing value."""

    column: Column
    operator: str
    value: Value


@dataclass(frozen=True)
class Query:
    """Rows that meet all ``conditions``, sorted by ``order`` (column, whether descending), then as stored;
    only ``columns`` of them, and no more than ``limit``."""

    columns: tuple[Column, ...]
    conditions: tuple[Condition, ...] = ()
    order: tuple[tuple[Column, bool], ...] = ()
    limit: int | None = None

    def sql(self, table: str, stored_order: str) -> tuple[str, list[Value]]:
        """A SELECT statement and its parameters; ``table`` and ``stored_order`` are of the program, not of a
        user. Missing values come last."""
        chosen = ", ".join(_quoted(column) for column in self.columns)
        parts, parameters = [f"SELECT {chosen} FROM {table}"], []
        clauses = [_clause(condition) for condition in self.conditions]
        if clauses:
            parts.append("WHERE " + " AND ".join(text for text, _ in clauses))
            parameters = [value for _, values in clauses for value in values]
        keys = [f"{_quoted(column)} {'DESC' if down else 'ASC'} NULLS LAST" for column, down in self.order]
        parts.append("ORDER BY " + ", ".join((*keys, stored_order)))
        if self.limit is not None:
            parts.append("LIMIT ?")
            parameters.append(min(self.limit, _MOST))
        return " ".join(parts), parameters


def parse_query(
    columns: Sequence[Column],
    where: Sequence[str] = (),
    sort: Sequence[str] = (),
    names: Sequence[str] = (),
    limit: int | None = None,
) -> Query:
    """The query of what a user wrote; ``columns`` are those there are, ``names`` those wanted (all, if none).

    Raises UsageError for a column that does not exist and for a condition or an order that is not understood.
    """
    known = {column.name: column for column in columns}
    wanted = tuple(_column(name, known) for name in names) or tuple(columns)
    conditions = tuple(_condition(text, known) for text in where)
    return Query(wanted, conditions, tuple(_order(text, known) for text in sort), limit)


def _condition(text: str, known: Mapping[str, Column]) -> Condition:
    match = _CONDITION.fullmatch(text)
    if match is None:
        raise UsageError(
            "a condition is not understood",
            text,
            f"column operator value, with an operator of {' '.join(OPERATORS)}",
            "write for example --where 'atoms <= 20'; repeat --where for 'and'",
        )
    name, operator, value = match.groups()
    column = _column(name, known)
    if value == _MISSING and operator in ("=", "==", "!="):
        return Condition(column, operator, None)
    if column.type == "bool" and operator not in ("=", "==", "!="):
        raise UsageError(
            "yes and no have no order", text, f"{name} = yes, {name} = no or {name} = none", "use = or !="
        )
    if operator == "~" and column.type != "text":
        raise UsageError(
            "a number contains no text", text, "~ is for columns of text", "use = or < or > with a number"
        )
    return Condition(column, operator, _value(column, value, text))


def _value(column: Column, text: str, condition: str) -> Value:
    """The text as a value of the column's type; quotes around a text are taken off."""
    if column.type == "text":
        bare = text[1:-1] if len(text) > 1 and text[0] == text[-1] and text[0] in "'\"" else text
        return bare.encode("utf-8", errors="backslashreplace").decode("utf-8")
    if column.type == "bool":
        if text.lower() not in _TRUTH:
            raise _no_value(column, "yes or no", condition)
        return _TRUTH[text.lower()]
    try:
        number = float(text)
    except ValueError as error:
        raise _no_value(column, "a number", condition) from error
    if not math.isfinite(number):
        raise _no_value(column, "a finite number", condition)
    return number


def _order(text: str, known: Mapping[str, Column]) -> tuple[Column, bool]:
    name, _, direction = text.partition(":")
    if direction not in ("", "asc", "desc"):
        raise UsageError(
            "an order is not understood", text, "column, column:asc or column:desc", "correct --sort"
        )
    return _column(name.strip(), known), direction == "desc"


def _column(name: str, known: Mapping[str, Column]) -> Column:
    if name not in known:
        raise UsageError(
            "there is no such column", name, f"columns are {', '.join(known)}", "name one of these"
        )
    return known[name]


def _clause(condition: Condition) -> tuple[str, list[Value]]:
    column = _quoted(condition.column)
    if condition.value is None:
        return f"{column} IS {'NOT ' if condition.operator == '!=' else ''}NULL", []
    if condition.operator == "~":
        return f"instr({column}, ?) > 0", [condition.value]
    return f"{column} {OPERATORS[condition.operator]} ?", [condition.value]


def _quoted(column: Column) -> str:
    """An identifier of SQL; names of columns are letters and underscores, which is verified here."""
    if not column.name.isidentifier():
        raise ValueError(f"{column.name!r} is no name of a column")
    return f'"{column.name}"'


def _no_value(column: Column, wanted: str, condition: str) -> UsageError:
    return UsageError(
        f"a value for the column {column.name} is not understood",
        condition,
        f"{column.name} is compared with {wanted}",
        "correct the value after --where",
    )
