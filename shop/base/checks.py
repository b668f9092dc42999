"""System checks of the house: what would else be noticed only by a reader."""

from __future__ import annotations

from typing import Any

from django.apps import apps
from django.core.checks import Error, register
from django.db import models

from shop.base.facts import Fact


@register()
def facts_are_never_cascaded(app_configs: Any, **kwargs: Any) -> list[Error]:
    """Deleting a master must not take facts with it."""
    found = []
    for model in apps.get_models():
        if not issubclass(model, Fact):
            continue
        for field in model._meta.get_fields():
            if isinstance(field, models.ForeignKey) and field.remote_field.on_delete is not models.PROTECT:
                found.append(Error(f"{model.__name__}.{field.name} must be PROTECT", id="base.E001"))
    return found
