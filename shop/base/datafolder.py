"""The folder that holds all a shop has: its secret, database, static files and message files."""

from __future__ import annotations

import fcntl
import hashlib
import os
import secrets
import shutil
import tempfile
from pathlib import Path

from django.conf import settings
from django.contrib.staticfiles.finders import get_finders
from django.core.management import call_command


class CannotOpen(Exception):
    """The shop can't be opened; the sentence says why and what to do."""


def prepare() -> None:
    """Make the data folder and its secret, readable by its owner alone.

    Raises CannotOpen.
    """
    home = settings.TAREBOOK_HOME
    try:
        home.mkdir(mode=0o700, parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=home):
            pass
        if not settings.SECRET_FILE.exists():
            _write_secret(settings.SECRET_FILE)
    except OSError as error:
        raise CannotOpen(
            f"The data folder {home} can't be written ({error.strerror or error}): give this account the right "
            "to write there, or name another folder in TAREBOOK_HOME."
        ) from error


def hold() -> int:
    """Keep a second `open` away from this folder for as long as this process lives.

    Raises CannotOpen.
    """
    home = settings.TAREBOOK_HOME
    held = os.open(home / "lock", os.O_RDWR | os.O_CREAT, 0o600)
    try:
        fcntl.flock(held, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError as error:
        os.close(held)
        raise CannotOpen(
            f"The shop in {home} is open already: use that one, stop it first, or name another folder in "
            "TAREBOOK_HOME."
        ) from error
    return held


def empty_bells(*, control: bool) -> None:
    """Throw message files away: they only ring, and a torn one would stop a worker again and again.

    The control folder says which queue listens; it goes only while nobody does.
    """
    folder: Path = settings.BROKER_FOLDER
    if control:
        shutil.rmtree(folder, ignore_errors=True)
    (folder / "control").mkdir(mode=0o700, parents=True, exist_ok=True)
    for message in folder.glob("*.msg"):
        message.unlink(missing_ok=True)


def gather_static() -> bool:
    """Copy the static files where the server serves them from; says whether anything had changed."""
    stamp = settings.STATIC_ROOT / ".stamp"
    digest = _static_digest()
    if stamp.exists() and stamp.read_text(encoding="ascii") == digest:
        return False
    shutil.rmtree(settings.STATIC_ROOT, ignore_errors=True)
    call_command("collectstatic", interactive=False, verbosity=0)
    stamp.write_text(digest, encoding="ascii")
    return True


def _static_digest() -> str:
    digest = hashlib.sha256(settings.STORAGES["staticfiles"]["BACKEND"].encode())
    for finder in get_finders():
        for path, storage in finder.list(None):
            facts = os.stat(storage.path(path))
            digest.update(f"{storage.path(path)} {facts.st_size} {facts.st_mtime_ns}\n".encode())
    return digest.hexdigest()


def _write_secret(path: Path) -> None:
    """Write it whole or not at all: under another name first."""
    handle, name = tempfile.mkstemp(dir=path.parent, prefix="secret-")  # mode 0600
    with os.fdopen(handle, "w", encoding="ascii") as file:
        file.write(secrets.token_urlsafe(64) + "\n")
    os.replace(name, path)
