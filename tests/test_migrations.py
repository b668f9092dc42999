"""The tables follow the models, and every migration says what it does."""

import re

import pytest
from django.core.management import call_command
from django.db import connection
from django.db.migrations.executor import MigrationExecutor
from django.db.migrations.loader import MigrationLoader

from tests.test_architecture import APPS_FROM_BELOW


@pytest.mark.django_db
def test_no_migration_is_missing():
    call_command("makemigrations", check=True, dry_run=True, verbosity=0)


def test_each_migration_is_named_by_what_it_does():
    names = [name for app, name in MigrationLoader(None).disk_migrations if app in APPS_FROM_BELOW]
    assert names
    assert [name for name in names if re.search(r"_auto_|_alter_.*_and_more$", name)] == []


@pytest.mark.django_db
def test_a_fresh_database_is_wholly_migrated():
    executor = MigrationExecutor(connection)
    assert executor.migration_plan(executor.loader.graph.leaf_nodes()) == []


@pytest.mark.django_db
def test_every_table_of_facts_refuses_change_and_deletion():
    from shop.base.facts import fact_tables

    with connection.cursor() as cursor:
        if connection.vendor == "postgresql":
            cursor.execute("SELECT tgname FROM pg_trigger WHERE NOT tgisinternal")
        else:
            cursor.execute("SELECT name FROM sqlite_master WHERE type = 'trigger'")
        laid = {name for (name,) in cursor.fetchall()}
    wanted = {f"{table}_no_{verb}" for table in fact_tables() for verb in ("update", "delete")}
    assert wanted
    assert wanted - laid == set()
