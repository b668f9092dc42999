"""The app that owns what all the others stand on: acts, facts, jobs, the shop itself."""

from django.apps import AppConfig
from django.db.models.signals import post_migrate


class BaseConfig(AppConfig):
    name = "shop.base"
    label = "base"
    verbose_name = "Shop"
    default_auto_field = "django.db.models.BigAutoField"

    def ready(self) -> None:
        from shop.base import checks, facts  # noqa: F401  (checks register themselves on import)

        # After every migrate, not in a migration: SQLite rebuilds a table to alter it and
        # drops its triggers on the way.
        post_migrate.connect(facts.protect_after_migrate, dispatch_uid="base.protect_facts")
