"""Bottles: the register, the scale, the books, refills."""

from django.apps import AppConfig


class BottlesConfig(AppConfig):
    name = "bottles"
    label = "bottles"
    default_auto_field = "django.db.models.BigAutoField"
