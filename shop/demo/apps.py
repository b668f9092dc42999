"""The invented shop of the demo."""

from django.apps import AppConfig


class DemoConfig(AppConfig):
    name = "shop.demo"
    label = "demo"
