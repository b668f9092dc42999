"""Check a row before it's saved: each field, and what holds between them."""

from __future__ import annotations

from django.db import models


def clean(row: models.Model) -> None:
    """Raise ValidationError where a row can't be kept.

    A column that may be null is a thing that isn't known: that's never an error, though Django
    asks every field of a model for a value unless a form may leave it out. Uniqueness is left to
    the database, which alone can tell while others write.
    """
    unknown = {field.name for field in row._meta.fields if field.null and getattr(row, field.attname) is None}
    row.full_clean(exclude=unknown, validate_unique=False, validate_constraints=False)
