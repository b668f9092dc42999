"""Facts are inserted once and never changed: a wrong one is struck or reversed by a second.

The model refuses in Python so that the sentence is clear; a trigger in the database refuses
whatever else may come along (a bulk update, a shell, another program).
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from django.apps import apps
from django.db import connection, models
from django.db.backends.base.base import BaseDatabaseWrapper


class FactChanged(Exception):
    """A fact can't be changed or deleted: record a second one that strikes or reverses it."""

    code = "fact changed"

    def __init__(self) -> None:
        super().__init__(type(self).__doc__)


class InsertedOnce(models.Model):
    """A row that is inserted and never changed again."""

    class Meta:
        abstract = True

    def save(self, *args: Any, **kwargs: Any) -> None:
        if not self._state.adding:
            raise FactChanged
        super().save(*args, **kwargs)

    def delete(self, *args: Any, **kwargs: Any) -> tuple[int, dict[str, int]]:
        raise FactChanged


class Fact(InsertedOnce):
    """A row that is inserted only; `act` says who recorded it, when, and by which form."""

    act = models.ForeignKey("base.Act", on_delete=models.PROTECT, related_name="+")

    class Meta:
        abstract = True


def fact_tables() -> list[str]:
    """Return the tables that hold facts, in order of name."""
    return sorted(model._meta.db_table for model in apps.get_models() if issubclass(model, InsertedOnce))


def protect_after_migrate(**kwargs: Any) -> None:
    """Lay the triggers on every fact table that exists (a handler of post_migrate)."""
    from django.db import connections

    protect(connections[kwargs["using"]])


def protect(conn: BaseDatabaseWrapper | None = None) -> None:
    """Lay the triggers that refuse UPDATE and DELETE on every fact table that exists."""
    conn = conn or connection
    present = set(conn.introspection.table_names())
    with conn.cursor() as cursor:
        if conn.vendor == "postgresql":
            cursor.execute(
                "CREATE OR REPLACE FUNCTION tarebook_fact_changed() RETURNS trigger AS $$ "
                "BEGIN RAISE EXCEPTION 'a fact can''t be changed or deleted'; END $$ LANGUAGE plpgsql"
            )
        for table in fact_tables():
            if table not in present:
                continue
            for verb in ("UPDATE", "DELETE"):
                name = f"{table}_no_{verb.lower()}"
                if conn.vendor == "postgresql":
                    cursor.execute(
                        f'CREATE OR REPLACE TRIGGER "{name}" BEFORE {verb} ON "{table}" '
                        "FOR EACH ROW EXECUTE FUNCTION tarebook_fact_changed()"
                    )
                else:
                    cursor.execute(
                        f'CREATE TRIGGER IF NOT EXISTS "{name}" BEFORE {verb} ON "{table}" '
                        "BEGIN SELECT RAISE(ABORT, 'a fact can''t be changed or deleted'); END"
                    )


@contextmanager
def suspended() -> Iterator[None]:
    """Take the triggers away for a while: only for emptying a test database."""
    present = set(connection.introspection.table_names())
    with connection.cursor() as cursor:
        for table in fact_tables():
            if table not in present:
                continue
            for verb in ("update", "delete"):
                where = f' ON "{table}"' if connection.vendor == "postgresql" else ""
                cursor.execute(f'DROP TRIGGER IF EXISTS "{table}_no_{verb}"{where}')
    try:
        yield
    finally:
        protect(connection)
