"""What was typed into a form whose sign-in had run out, until its person signs in again."""

from __future__ import annotations

from typing import Any

from django.core import signing
from django.http import HttpRequest, QueryDict

LONGEST = 64_000  # characters of one form that are kept
NOT_KEPT = {"csrfmiddlewaretoken", "who", "password", "new_password", "old_password", "kept", "form_key"}
SALT = "tarebook.kept"


def pack(request: HttpRequest) -> str:
    """Return the posted form, signed, to travel through the sign-in page; empty if too long."""
    data = request.POST.copy()
    for name in NOT_KEPT:
        data.pop(name, None)
    text = data.urlencode()
    if len(text) > LONGEST:
        return ""
    return signing.dumps({"path": request.path, "data": text}, salt=SALT, compress=True)


def put(request: HttpRequest, packed: str) -> str | None:
    """Lay what travelled into the fresh session; return the path of its page, or None."""
    try:
        found = signing.loads(packed, salt=SALT, max_age=24 * 60 * 60)
    except signing.BadSignature:
        return None
    request.session["kept"] = found
    return str(found["path"])


def take(request: HttpRequest) -> Any:
    """Return what was typed for this page and forget it, or None."""
    found = request.session.get("kept")
    if not found or found["path"] != request.path:
        return None
    del request.session["kept"]
    data = QueryDict(found["data"], mutable=True)
    from uuid import uuid4

    data["form_key"] = str(uuid4())  # a new form, though with the old words
    return data
