"""What was typed into a form whose sign-in had run out, until its person signs in again."""

from __future__ import annotations

from typing import Any
from uuid import uuid4

from django.core import signing
from django.http import HttpRequest, QueryDict

LONGEST = 64_000  # characters of one form that are kept
SECRETS = {"who", "password", "new_password", "old_password", "again", "new_badge", "new_code"}
NOT_KEPT = SECRETS | {"csrfmiddlewaretoken", "kept", "form_key"}
SALT = "tarebook.kept"
HOLDS_S = 24 * 60 * 60


def pack(request: HttpRequest) -> str:
    """Return the posted form, signed, to travel through the sign-in page; empty if too long."""
    data = request.POST.copy()
    for name in NOT_KEPT:
        data.pop(name, None)
    text = data.urlencode()
    if len(text) > LONGEST:
        return ""
    found = {"path": request.path, "page": request.get_full_path(), "data": text}
    return signing.dumps(found, salt=SALT, compress=True)


def put(request: HttpRequest, packed: str, *, why: str) -> str | None:
    """Lay what travelled into the session; return the address of its page, or None."""
    try:
        found = signing.loads(packed, salt=SALT, max_age=HOLDS_S)
    except signing.BadSignature:
        return None
    request.session["kept"] = found | {"why": why}
    return str(found["page"])


def take(request: HttpRequest) -> Any:
    """Return what was typed for this page and forget it, or None.

    The data's `why` tells whether the sign-in ran out or only the page's token.
    """
    found = request.session.get("kept")
    if not found or found["path"] != request.path:
        return None
    del request.session["kept"]
    data = QueryDict(found["data"], mutable=True)
    data["form_key"] = str(uuid4())  # a new form, though with the old words
    data.why = found["why"]  # type: ignore[attr-defined]
    return data
