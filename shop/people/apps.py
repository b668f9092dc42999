"""People: who signs in, who owns bottles and cars."""

from django.apps import AppConfig


class PeopleConfig(AppConfig):
    name = "shop.people"
    label = "people"
    default_auto_field = "django.db.models.BigAutoField"
