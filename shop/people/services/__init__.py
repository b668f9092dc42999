"""Writing people: one verb family a file."""

from shop.people.services.founding import found_shop
from shop.people.services.identifying import digest, identify

__all__ = ["digest", "found_shop", "identify"]
