"""Writing people: one verb family a file."""

from shop.people.services.customers import add_customer, change_customer, record_consent
from shop.people.services.founding import found_shop
from shop.people.services.identifying import digest, identify
from shop.people.services.managing import add_person, change_person, set_badge, set_code, set_password, set_units

__all__ = [
    "add_customer",
    "add_person",
    "change_customer",
    "change_person",
    "digest",
    "found_shop",
    "identify",
    "record_consent",
    "set_badge",
    "set_code",
    "set_password",
    "set_units",
]
