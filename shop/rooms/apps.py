"""The three rooms, and the pages about one thing that show something of several apps."""

from django.apps import AppConfig


class RoomsConfig(AppConfig):
    name = "shop.rooms"
    label = "rooms"
