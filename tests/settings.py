"""The shop's settings, as the tests need them."""

import os
import tempfile
from pathlib import Path

# Workers started by a test bring their own broker and data folder; nothing else may ring or write one.
os.environ.setdefault("TAREBOOK_BROKER_URL", "memory://")
os.environ.setdefault("TAREBOOK_SECRET_KEY", "for tests only " * 5)
# A browser test asks the database from the thread in which Playwright keeps its event loop.
os.environ.setdefault("DJANGO_ALLOW_ASYNC_UNSAFE", "true")

from shop.settings import *  # noqa: F403
from shop.settings import DATABASES, STORAGES

# A file, because an in-memory database has no write-ahead log and no worker can see it. Named by
# the process, so that several runs at a time have each their own.
_name = os.environ.get("TAREBOOK_TEST_DATABASE", f"tarebook_test_{os.getpid()}")
if DATABASES["default"]["ENGINE"].endswith("sqlite3"):
    _name = str(Path(tempfile.gettempdir()) / f"{_name}.sqlite3")
DATABASES["default"]["TEST"] = {"NAME": _name}

PASSWORD_HASHERS = ["django.contrib.auth.hashers.MD5PasswordHasher"]  # the real one takes a third of a second
STORAGES["staticfiles"] = {"BACKEND": "django.contrib.staticfiles.storage.StaticFilesStorage"}
WHITENOISE_AUTOREFRESH = True
