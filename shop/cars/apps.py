"""Cars that come into the shop."""

from django.apps import AppConfig


class CarsConfig(AppConfig):
    name = "shop.cars"
    label = "cars"
    default_auto_field = "django.db.models.BigAutoField"
