"""Queries: what they find, and that a user's text never becomes SQL."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from sitesym.errors import UsageError
from sitesym.screening.columns import COLUMNS, Column, columns_for
from sitesym.screening.query import OPERATORS, parse_query

HOSTILE = ["'; drop table rows; --", '"', "'quoted'", "a\nb", "=cmd", "<script>", "100%", "_", "none"]
ROWS = [
    {"id": "quartz", "atoms": 9, "point_group": "321", "polar": False, "seconds": 0.5, "status": "ok"},
    {"id": "salt", "atoms": 2, "point_group": "m-3m", "polar": False, "seconds": 0.25, "status": "ok"},
    {"id": "zincite", "atoms": 4, "point_group": "6mm", "polar": True, "seconds": 1.0, "status": "ok"},
    {"id": "triclinic", "atoms": 20, "point_group": "-1", "polar": False, "seconds": 2.0, "status": "ok"},
    {"id": "broken", "status": "error", "error_code": "overlap"},
    *({"id": text, "atoms": 1, "status": "ok"} for text in HOSTILE),
]
KINDS = {"text": "TEXT", "int": "INTEGER", "float": "REAL", "bool": "INTEGER"}
Found = Callable[..., list[str]]


@pytest.fixture(scope="module")
def connection() -> sqlite3.Connection:
    """The rows in a table of SQLite."""
    made = sqlite3.connect(":memory:")
    columns = columns_for()
    made.execute(f"CREATE TABLE rows ({', '.join(f'{c.name} {KINDS[c.type]}' for c in columns)})")
    for row in ROWS:
        places = ", ".join("?" for _ in columns)
        made.execute(f"INSERT INTO rows VALUES ({places})", [row.get(name) for name in COLUMNS])
    return made


@pytest.fixture(scope="module")
def found(connection: sqlite3.Connection) -> Found:
    """Ids of the rows a query finds."""

    def find(*where: str, sort: tuple[str, ...] = (), limit: int | None = None) -> list[str]:
        query = parse_query(columns_for(), where, sort, ["id"], limit)
        return [identity for (identity,) in connection.execute(*query.sql("rows", "rowid"))]

    return find


@pytest.mark.parametrize(
    ("where", "ids"),
    [
        (["atoms >= 9"], ["quartz", "triclinic"]),
        (["atoms>2", "atoms<20"], ["quartz", "zincite"]),
        (["point_group = -1"], ["triclinic"]),
        (["point_group=321"], ["quartz"]),
        (["point_group != 321", "point_group != -1"], ["salt", "zincite"]),
        (["polar = yes"], ["zincite"]),
        (["polar == FALSE", "seconds < 0.5"], ["salt"]),
        (["error_code = none", "atoms > 1"], ["quartz", "salt", "zincite", "triclinic"]),
        (["error_code != none"], ["broken"]),
        (["id ~ in"], ["zincite", "triclinic"]),
        (["id = 'none'"], ["none"]),
        (["id ~ %"], ["100%"]),
        (["seconds = 0.25"], ["salt"]),
    ],
)
def test_conditions_find_what_they_say(found: Found, where: list[str], ids: list[str]) -> None:
    assert found(*where) == ids


def test_order_puts_missing_values_last_and_keeps_the_stored_order_of_equals(found: Found) -> None:
    assert found("status != ok", sort=("atoms",)) == ["broken"]
    assert found("polar = no", sort=("polar", "atoms:desc")) == ["triclinic", "quartz", "salt"]
    assert found(sort=("seconds:desc",), limit=2) == ["triclinic", "zincite"]
    assert found(sort=("seconds:desc",), limit=10**30) == found(sort=("seconds:desc",))
    assert found("status ~ o", sort=("point_group:asc",))[:4] == ["triclinic", "quartz", "zincite", "salt"]
    assert found(sort=("atoms:desc",))[-1] == "broken"


@pytest.mark.parametrize("text", HOSTILE)
def test_hostile_text_is_found_as_text(found: Found, text: str, connection: sqlite3.Connection) -> None:
    assert found(f'id = "{text}"') == [text]
    assert connection.execute("SELECT count(*) FROM rows").fetchone() == (len(ROWS),)


#: Every statement that conditions on the column id can become.
STATEMENTS = {
    parse_query(columns_for(), [f"id {sign} {value}"], [], ["id"]).sql("rows", "rowid")[0]
    for sign in OPERATORS
    for value in ("x", "none")
}


#: Characters with a meaning in SQL, in conditions or in terminals, and a few without.
CHARACTERS = st.sampled_from("ab01 =<>!~'\"`;:-/*()[]%_,.?@$#\\\n\t\0é\u202e\U0001f48e")


@settings(deadline=None, max_examples=60)
@given(
    name=st.text(CHARACTERS, max_size=30),
    operator=st.sampled_from(list(OPERATORS)),
    value=st.text(CHARACTERS, max_size=40),
)
def test_any_text_is_refused_or_bound_and_never_part_of_the_statement(
    name: str, operator: str, value: str
) -> None:
    query = parse_query(columns_for(), [f"id {operator} {value}"], [], ["id"])
    statement, parameters = query.sql("rows", "rowid")
    assert statement in STATEMENTS
    assert len(parameters) == statement.count("?")
    if name.strip() not in COLUMNS:
        with pytest.raises(UsageError):
            parse_query(columns_for(), [f"{name} {operator} {value}"])
        with pytest.raises(UsageError):
            parse_query(columns_for(), [], [name])


@pytest.mark.parametrize(
    "text",
    ["", "atoms", "atoms 3", "atoms = x", "atoms = inf", "atoms = nan", "polar = perhaps", "polar < yes",
     "atoms ~ 3", "1=1", "id = 1 or 1=1 --; atoms", "id; drop table rows = 1", "rowid = 1"],
)  # fmt: skip
def test_conditions_that_mean_nothing_are_refused_with_their_text(text: str) -> None:
    if text.startswith("id = "):
        # A value may hold anything: this is a text to compare with.
        assert parse_query(columns_for(), [text]).conditions[0].value == text[5:]
        return
    with pytest.raises(UsageError):
        parse_query(columns_for(), [text])


@pytest.mark.parametrize("text", ["atoms:up", "nothing", "atoms desc", "atoms;--"])
def test_orders_that_mean_nothing_are_refused(text: str) -> None:
    with pytest.raises(UsageError):
        parse_query(columns_for(), [], [text])


def test_a_column_of_the_program_with_a_faulty_name_never_reaches_sql() -> None:
    column = Column('a" FROM x; --', "int", "")
    with pytest.raises(ValueError, match="no name"):
        parse_query([column]).sql("rows", "rowid")
