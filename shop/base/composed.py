"""Queries that are composed once and then only asked.

Django composes a query anew each time, which takes longer than the database takes to answer it. A
function that returns a queryset, decorated with `composed`, is called once for each shape of its
arguments, with stand-ins in their places; from then on its text is kept and the values are put in.
The rows are made as ever, by the queryset's own iterable.
"""

from __future__ import annotations

import copy
from collections.abc import Callable, Collection, Iterable
from dataclasses import dataclass
from datetime import UTC, date, datetime, timedelta
from functools import wraps
from typing import Any

from django.db import DEFAULT_DB_ALIAS, connections
from django.db.models import QuerySet

Value = int | str | date  # a moment is a date, too

# A list is filled up with its last key to the next of these lengths, so that few texts are kept.
LENGTHS = (1, 2, 4, 8, 16, 32, 64, 128)
_KEYS_FROM, _DAY, _MOMENT = 7_000_000_000_000_001, date(9001, 1, 1), datetime(9001, 1, 1, tzinfo=UTC)  # of stand-ins


@dataclass(frozen=True, slots=True)
class _Text:
    """A query's text, and which of its parameters is which of the values; those without one are its own."""

    rows: QuerySet[Any]
    compiler: Any
    sql: str
    params: tuple[Any, ...]
    places: tuple[int | None, ...]


def composed(build: Callable[..., QuerySet[Any]]) -> Callable[..., list[Any]]:
    """Make a function that returns a queryset into one that returns its rows, composed once.

    Its arguments, all of them by place, are keys, texts, days, moments, or collections of keys; each must be
    compared with as it is, and nothing in `build` may depend on what they are, nor on anything else.
    """
    known: dict[tuple[Any, ...], _Text] = {}

    @wraps(build)
    def ask(*args: Value | Collection[int]) -> list[Any]:
        given: list[Any] = [one if isinstance(one, Value) else _filled_up(one) for one in args]
        if () in given:
            return list(build(*args))
        connection = connections[DEFAULT_DB_ALIAS]
        shape = (connection.vendor, *(len(one) if isinstance(one, tuple) else type(one) for one in given))
        text = known.get(shape)
        if text is None:
            text = known[shape] = _compose(build, given, connection)
        flat = [each for one in given for each in (one if isinstance(one, tuple) else (one,))]
        return _ask(text, [_adapted(one, connection) for one in flat], connection)

    return ask


def _filled_up(keys: Iterable[int]) -> tuple[int, ...]:
    """Keys in one of the lengths; none where there are none, or more than a text is kept for."""
    found = tuple(keys)
    length = next((one for one in LENGTHS if one >= len(found)), 0)
    return found + found[-1:] * (length - len(found)) if length else ()


def _compose(build: Callable[..., QuerySet[Any]], given: list[Any], connection: Any) -> _Text:
    stand_ins: list[Value] = []

    def stand_in(value: Value) -> Value:
        number = len(stand_ins)
        made: Value
        if isinstance(value, datetime):
            made = _MOMENT + timedelta(days=number)
        elif isinstance(value, date):
            made = _DAY + timedelta(days=number)
        else:
            made = f"stand-in {number}" if isinstance(value, str) else _KEYS_FROM + 1_000 * number
        stand_ins.append(made)
        return made

    rows = build(*[tuple(map(stand_in, one)) if isinstance(one, tuple) else stand_in(one) for one in given])
    if rows._prefetch_related_lookups or rows._known_related_objects:  # type: ignore[attr-defined]
        raise TypeError(f"{build.__name__} asks for more than one query's rows")
    compiler = rows.query.get_compiler(using=rows.db)
    sql, params = compiler.as_sql()
    numbers = {_adapted(one, connection): number for number, one in enumerate(stand_ins)}
    places = tuple(numbers.get(param) if isinstance(param, int | str | date) else None for param in params)
    if len(set(places) - {None}) != len(stand_ins):
        raise TypeError(f"{build.__name__} doesn't compare with each of its arguments as it is")
    return _Text(rows, compiler, sql, tuple(params), places)


def _ask(text: _Text, values: list[Any], connection: Any) -> list[Any]:
    """Put the values in their places, and let the queryset's own iterable make the rows."""
    params = tuple(
        param if place is None else values[place] for param, place in zip(text.params, text.places, strict=True)
    )
    compiler = copy.copy(text.compiler)
    compiler.connection = connection
    compiler.as_sql = lambda *_, **__: (text.sql, params)
    query = copy.copy(text.rows.query)
    query.get_compiler = lambda *_, **__: compiler  # type: ignore[method-assign]
    rows: Any = type(text.rows)(model=text.rows.model, query=query, using=DEFAULT_DB_ALIAS)
    rows._iterable_class, rows._fields = text.rows._iterable_class, text.rows._fields  # type: ignore[attr-defined]
    return list(rows._iterable_class(rows))


def _adapted(value: Value, connection: Any) -> Any:
    """A value as the database takes it."""
    if isinstance(value, datetime):
        return connection.ops.adapt_datetimefield_value(value)
    return connection.ops.adapt_datefield_value(value) if isinstance(value, date) else value
