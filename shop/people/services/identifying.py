"""Badges and short codes: who acts at a counter that stays open."""

from __future__ import annotations

from django.utils.crypto import salted_hmac

from shop.people.models import User


def digest(text: str) -> str:
    """Return the keyed digest under which a badge or short code is kept."""
    return salted_hmac("tarebook.badge", text.strip().casefold(), algorithm="sha256").hexdigest()


def identify(text: str) -> User | None:
    """Return the active person whose badge or short code this is, or None."""
    from django.db.models import Q

    if not text.strip():
        return None
    mine = digest(text)
    return User.objects.filter(Q(badge_digest=mine) | Q(code_digest=mine), is_active=True).first()
