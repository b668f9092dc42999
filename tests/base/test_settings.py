"""Production refuses to start half-configured; each refusal names the setting."""

import os
import subprocess
import sys

import pytest
from django.conf import settings

KEY = "k" * 60


def load(home, **env: str) -> subprocess.CompletedProcess[str]:
    """Load the settings in a process of their own; print what matters."""
    clean = {k: v for k, v in os.environ.items() if not k.startswith(("TAREBOOK_", "DATABASE_URL", "DJANGO_"))}
    program = (
        "from shop import settings as s\n"
        "print(s.ALLOWED_HOSTS, s.SESSION_COOKIE_SECURE, s.CSRF_TRUSTED_ORIGINS, s.DATABASES['default'].get('OPTIONS'))\n"
    )
    return subprocess.run(
        [sys.executable, "-c", program], cwd=settings.BASE_DIR, env=clean | {"TAREBOOK_HOME": str(home)} | env,
        capture_output=True, text=True, timeout=60, check=False,
    )  # fmt: skip


PUBLIC = {"TAREBOOK_ADDRESS": "https://bottles.example", "TAREBOOK_SECRET_KEY": KEY}


@pytest.mark.parametrize(
    ("env", "named"),
    [
        ({"TAREBOOK_ADDRESS": "https://bottles.example"}, "TAREBOOK_SECRET_KEY"),
        (PUBLIC | {"TAREBOOK_SECRET_KEY": "short"}, "TAREBOOK_SECRET_KEY"),
        (PUBLIC | {"TAREBOOK_DEBUG": "yes"}, "TAREBOOK_DEBUG"),
        (PUBLIC | {"TAREBOOK_HOSTS": "*"}, "TAREBOOK_HOSTS"),
        ({"TAREBOOK_HOSTS": "bottles.example", "TAREBOOK_SECRET_KEY": KEY}, "TAREBOOK_ADDRESS"),
        (PUBLIC | {"TAREBOOK_ADDRESS": "http://bottles.example"}, "TAREBOOK_PLAIN_HTTP"),
        ({"DATABASE_URL": "mysql://root@127.0.0.1/test"}, "DATABASE_URL"),
    ],
)
def test_half_configured_it_refuses_and_names_the_setting(tmp_path, env, named):
    told = load(tmp_path, **env)
    assert told.returncode != 0
    assert named in told.stderr.strip().splitlines()[-1]


def test_over_https_cookies_are_secure_and_the_origin_is_trusted(tmp_path):
    told = load(tmp_path, **PUBLIC)
    assert told.returncode == 0, told.stderr
    assert "'bottles.example'] True ['https://bottles.example']" in told.stdout


def test_on_loopback_it_needs_nothing_and_writes_nothing(tmp_path):
    home = tmp_path / "shop"
    told = load(home)
    assert told.returncode == 0, told.stderr
    assert "'transaction_mode': 'IMMEDIATE'" in told.stdout
    assert "journal_mode=WAL" in told.stdout
    assert not home.exists()


def test_only_the_web_server_keeps_a_pool_of_connections(tmp_path):
    url = "postgres://postgres@127.0.0.1/test"
    assert "pool" not in load(tmp_path, DATABASE_URL=url).stdout
    assert "pool" in load(tmp_path, DATABASE_URL=url, TAREBOOK_POOL="yes").stdout


def test_a_secret_can_come_from_a_file(tmp_path):
    (tmp_path / "key").write_text(KEY, encoding="ascii")
    told = load(tmp_path, TAREBOOK_ADDRESS="https://bottles.example", TAREBOOK_SECRET_KEY_FILE=str(tmp_path / "key"))
    assert told.returncode == 0, told.stderr


def test_requests_are_not_whole_transactions():
    """On SQLite every page would then wait for whoever writes."""
    assert not settings.DATABASES["default"].get("ATOMIC_REQUESTS")
