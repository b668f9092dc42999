"""One base for every way of running, read from the environment.

Nothing here touches the disc beyond reading a secret that is already there: `manage.py check`
and the tests leave no data folder behind. Wherever the shop is reachable from another machine
these settings refuse to load half-configured.
"""

import secrets
import sys
from importlib.util import find_spec
from pathlib import Path
from urllib.parse import urlsplit

# A newer SQLite than the system's: several systems ship one from before a fix of the write-ahead
# log, and web server and worker writing together is what triggers the fault.
try:
    import pysqlite3
    import pysqlite3.dbapi2
except ImportError:
    pass
else:
    sys.modules["sqlite3"] = pysqlite3
    sys.modules["sqlite3.dbapi2"] = pysqlite3.dbapi2

import environ
from csp.constants import NONE, SELF
from django.core.exceptions import ImproperlyConfigured

env = environ.FileAwareEnv()  # X_FILE names a file that holds the value of X

BASE_DIR = Path(__file__).resolve().parent.parent
TAREBOOK_HOME = Path(env.str("TAREBOOK_HOME", default=str(BASE_DIR / ".tarebook"))).expanduser().absolute()

# --- where it is reachable, and what that demands -------------------------------------------------

LOOPBACK = ["127.0.0.1", "localhost", "[::1]"]
DEBUG = env.bool("TAREBOOK_DEBUG", default=False)
TAREBOOK_ADDRESS = env.str("TAREBOOK_ADDRESS", default="").rstrip("/")  # as people and labels reach it
_address = urlsplit(TAREBOOK_ADDRESS)
ALLOWED_HOSTS = env.list("TAREBOOK_HOSTS", default=LOOPBACK)
if _address.hostname and _address.hostname not in ALLOWED_HOSTS:
    ALLOWED_HOSTS = [*ALLOWED_HOSTS, _address.hostname]
ON_LOOPBACK = set(ALLOWED_HOSTS) <= {*LOOPBACK, "::1"}
HTTPS = _address.scheme == "https"
CSRF_TRUSTED_ORIGINS = [f"{_address.scheme}://{_address.netloc}"] if HTTPS else []

SECRET_FILE = TAREBOOK_HOME / "secret"


def _secret_key() -> str:
    key: str = env.str("TAREBOOK_SECRET_KEY", default="")
    if not key:
        try:
            key = SECRET_FILE.read_text(encoding="ascii").strip()
        except OSError:
            key = ""
    if not key and ON_LOOPBACK:
        return secrets.token_urlsafe(50)  # for this process only: nobody stays signed in by it
    if len(key) < 50:
        raise ImproperlyConfigured(
            f"The secret key is missing or shorter than 50 characters: set TAREBOOK_SECRET_KEY, or let "
            f"`manage.py open` write {SECRET_FILE}."
        )
    return key


SECRET_KEY = _secret_key()

if not ON_LOOPBACK:
    if DEBUG:
        raise ImproperlyConfigured("TAREBOOK_DEBUG shows secrets to whoever asks: only on loopback.")
    if "*" in ALLOWED_HOSTS:
        raise ImproperlyConfigured("TAREBOOK_HOSTS must name the hosts; '*' isn't one.")
    if _address.scheme not in ("http", "https") or not _address.hostname:
        raise ImproperlyConfigured(
            "Other machines can reach this shop, so TAREBOOK_ADDRESS must say how, "
            "for instance https://bottles.example."
        )
    if not HTTPS and not env.bool("TAREBOOK_PLAIN_HTTP", default=False):
        raise ImproperlyConfigured(
            "Over plain http passwords cross the network unprotected. Put a TLS proxy in front and give an "
            "https TAREBOOK_ADDRESS, or accept it on a closed network with TAREBOOK_PLAIN_HTTP=yes."
        )

# --- apps and the way of a request ----------------------------------------------------------------

INSTALLED_APPS = [
    "shop.base",
    "shop.people",
    "shop.cars",
    "bottles",
    "shop.rooms",
    "shop.demo",
    "django.contrib.auth",
    "django.contrib.contenttypes",
    "django.contrib.sessions",
    "django.contrib.messages",
    "whitenoise.runserver_nostatic",
    "django.contrib.staticfiles",
    "csp",
    "django_htmx",
    "django_otp",
    "django_otp.plugins.otp_totp",
    "django_otp.plugins.otp_static",
    "axes",
]

MIDDLEWARE = [
    "django.middleware.security.SecurityMiddleware",
    "whitenoise.middleware.WhiteNoiseMiddleware",
    "csp.middleware.CSPMiddleware",
    "django.contrib.sessions.middleware.SessionMiddleware",
    "django.middleware.common.CommonMiddleware",
    "django.middleware.csrf.CsrfViewMiddleware",
    "django.contrib.auth.middleware.AuthenticationMiddleware",
    "django_otp.middleware.OTPMiddleware",
    "shop.people.middleware.SignInFirst",
    "django.contrib.messages.middleware.MessageMiddleware",
    "django.middleware.clickjacking.XFrameOptionsMiddleware",
    "django_htmx.middleware.HtmxMiddleware",
    "axes.middleware.AxesMiddleware",
]

ROOT_URLCONF = "shop.urls"
WSGI_APPLICATION = "shop.wsgi.application"

TEMPLATES = [
    {
        "BACKEND": "django.template.backends.django.DjangoTemplates",
        "DIRS": [BASE_DIR / "templates"],
        "APP_DIRS": True,
        "OPTIONS": {
            "context_processors": [
                "django.template.context_processors.request",
                "django.contrib.auth.context_processors.auth",
                "django.contrib.messages.context_processors.messages",
                "shop.base.context.frame",
            ],
        },
    }
]

# --- database -------------------------------------------------------------------------------------

_database = env.db_url("DATABASE_URL", default=f"sqlite:///{TAREBOOK_HOME / 'tarebook.sqlite3'}")
if _database["ENGINE"] == "django.db.backends.sqlite3":
    # IMMEDIATE takes the write lock at the head of a transaction: in the deferred mode two writers
    # that both began by reading can't be told apart, and one fails at once with "database is locked".
    _database |= {
        "CONN_MAX_AGE": None,
        "OPTIONS": {
            "transaction_mode": "IMMEDIATE",
            "timeout": 20,
            "init_command": "PRAGMA journal_mode=WAL;PRAGMA synchronous=FULL;",
        },
    }
elif _database["ENGINE"] == "django.db.backends.postgresql":
    _database |= {"CONN_MAX_AGE": 0}
    if env.bool("TAREBOOK_POOL", default=False):
        _database["OPTIONS"] = _database.get("OPTIONS", {}) | {"pool": {"min_size": 1, "max_size": 8}}
else:
    raise ImproperlyConfigured("DATABASE_URL must begin with sqlite:// or postgres://.")
# Never ATOMIC_REQUESTS: on SQLite every page would then wait for whoever writes.
DATABASES = {"default": _database}
DEFAULT_AUTO_FIELD = "django.db.models.BigAutoField"

# --- people ---------------------------------------------------------------------------------------

AUTH_USER_MODEL = "people.User"
AUTHENTICATION_BACKENDS = [
    "axes.backends.AxesStandaloneBackend",
    "django.contrib.auth.backends.ModelBackend",
]
AUTH_PASSWORD_VALIDATORS = [
    {
        "NAME": "django.contrib.auth.password_validation.UserAttributeSimilarityValidator",
        "OPTIONS": {"user_attributes": ["sign_in_name", "name"]},
    },
    {"NAME": "django.contrib.auth.password_validation.MinimumLengthValidator"},
    {"NAME": "django.contrib.auth.password_validation.CommonPasswordValidator"},
]
LOGIN_URL = "people:sign_in"
LOGIN_REDIRECT_URL = "/"
CSRF_FAILURE_VIEW = "shop.people.views.signing_in.csrf_failure"
SESSION_ENGINE = "django.contrib.sessions.backends.db"
SESSION_COOKIE_AGE = 12 * 60 * 60  # a working day
OTP_TOTP_ISSUER = "Tarebook"

# Ten wrong passwords for one name from one machine: a quarter of an hour's wait.
AXES_FAILURE_LIMIT = 10
AXES_COOLOFF_TIME = 0.25  # hours
AXES_LOCKOUT_PARAMETERS = [["username", "ip_address"]]
AXES_RESET_ON_SUCCESS = True
AXES_VERBOSE = False
AXES_USERNAME_FORM_FIELD = "username"  # what authenticate() is given; without it every name counts as none
AXES_SENSITIVE_PARAMETERS = ["username", "ip_address", "name", "kept"]
AXES_LOCKOUT_CALLABLE = "shop.people.views.signing_in.locked_out"

# --- headers --------------------------------------------------------------------------------------

CONTENT_SECURITY_POLICY = {
    "DIRECTIVES": {
        "default-src": [NONE],
        "script-src": [SELF],
        "style-src": [SELF],
        "img-src": [SELF],
        "font-src": [SELF],
        "connect-src": [SELF],
        "manifest-src": [SELF],
        "form-action": [SELF],
        "frame-ancestors": [NONE],
        "base-uri": [NONE],
    }
}
X_FRAME_OPTIONS = "DENY"
SECURE_CONTENT_TYPE_NOSNIFF = True
SECURE_REFERRER_POLICY = "same-origin"
SECURE_CROSS_ORIGIN_OPENER_POLICY = "same-origin"
SESSION_COOKIE_HTTPONLY = True
SESSION_COOKIE_SAMESITE = "Lax"
CSRF_COOKIE_HTTPONLY = True
CSRF_COOKIE_SAMESITE = "Lax"
SESSION_COOKIE_SECURE = CSRF_COOKIE_SECURE = HTTPS
if HTTPS:
    SECURE_HSTS_SECONDS = 31_536_000
    if env.bool("TAREBOOK_BEHIND_PROXY", default=False):  # only where the proxy overwrites the header
        SECURE_PROXY_SSL_HEADER = ("HTTP_X_FORWARDED_PROTO", "https")
# Large enough for a form to answer an overlong paste itself; fields hold their own limits.
DATA_UPLOAD_MAX_MEMORY_SIZE = 8 * 1024 * 1024

# --- language, zone, static files -----------------------------------------------------------------

LANGUAGE_CODE = "en-gb"
USE_I18N = True
USE_TZ = True
TIME_ZONE = "UTC"  # what is stored; the shop's own zone is in its row

STATIC_URL = "static/"
STATIC_ROOT = TAREBOOK_HOME / "static"
_font = find_spec("fontpkg_ibm_plex_sans")
if _font is None or not _font.submodule_search_locations:
    raise ImproperlyConfigured("The package fontpkg-ibm-plex-sans is missing: pip install -r requirements.txt.")
FONT_FOLDER = Path(next(iter(_font.submodule_search_locations))) / "files"
STATICFILES_DIRS = [("fonts", FONT_FOLDER)]
STORAGES = {
    "default": {"BACKEND": "django.core.files.storage.FileSystemStorage"},
    "staticfiles": {"BACKEND": "whitenoise.storage.CompressedManifestStaticFilesStorage"},
}
if DEBUG:
    STORAGES["staticfiles"] = {"BACKEND": "django.contrib.staticfiles.storage.StaticFilesStorage"}

# --- background work ------------------------------------------------------------------------------

# A job's row is the truth (shop.base.jobs); the broker only rings for it.
# One machine: message files in the data folder, no outside service. Several: redis://host/0.
BROKER_FOLDER = TAREBOOK_HOME / "bells"
BROKER_URL = env.str("TAREBOOK_BROKER_URL", default="filesystem://localhost/")
JOB_LEASE_SECONDS = env.int("TAREBOOK_JOB_LEASE_SECONDS", default=60)  # a handler reports sooner than that
JOB_SWEEP_SECONDS = env.int("TAREBOOK_JOB_SWEEP_SECONDS", default=10)

CELERY_BROKER_URL = BROKER_URL
CELERY_BROKER_CONNECTION_TIMEOUT = 2
CELERY_BROKER_CONNECTION_RETRY_ON_STARTUP = True
# A page that asks for work must not wait for a broker that's away: one short attempt.
CELERY_BROKER_TRANSPORT_OPTIONS: dict[str, int | float | str] = {
    "max_retries": 1,
    "interval_start": 0,
    "interval_step": 0,
    "interval_max": 0,
}
if BROKER_URL.startswith("filesystem:"):
    CELERY_BROKER_TRANSPORT_OPTIONS |= {
        "data_folder_in": str(BROKER_FOLDER),
        "data_folder_out": str(BROKER_FOLDER),
        "control_folder": str(BROKER_FOLDER / "control"),
        "polling_interval": 0.2,
    }
elif BROKER_URL.startswith("redis"):
    CELERY_BROKER_TRANSPORT_OPTIONS |= {"socket_connect_timeout": 2}
CELERY_TASK_DEFAULT_QUEUE = env.str("TAREBOOK_QUEUE", default="tarebook")  # where shops share a Redis: one each
CELERY_TASK_IGNORE_RESULT = True
CELERY_TASK_ACKS_LATE = True
CELERY_TASK_REJECT_ON_WORKER_LOST = True
CELERY_TASK_SERIALIZER = "json"
CELERY_ACCEPT_CONTENT = ["json"]
CELERY_WORKER_PREFETCH_MULTIPLIER = 1
CELERY_WORKER_ENABLE_REMOTE_CONTROL = False
CELERY_WORKER_SEND_TASK_EVENTS = False
CELERY_WORKER_HIJACK_ROOT_LOGGER = False
CELERY_TIMEZONE = "UTC"
CELERY_BEAT_SCHEDULER = "celery.beat:Scheduler"  # keeps no file: what is due stands in the job rows
CELERY_BEAT_SCHEDULE = {
    "ring again": {
        "task": "base.sweep",
        "schedule": JOB_SWEEP_SECONDS,
        "options": {"expires": JOB_SWEEP_SECONDS},
    },
    "ask for what is due daily": {"task": "base.ask_due", "schedule": 300, "options": {"expires": 300}},
}

# --- logging --------------------------------------------------------------------------------------

LOGGING = {
    "version": 1,
    "disable_existing_loggers": False,
    "formatters": {"line": {"format": "{asctime} {levelname} {name}: {message}", "style": "{"}},
    "handlers": {"console": {"class": "logging.StreamHandler", "formatter": "line"}},
    "root": {"handlers": ["console"], "level": env.str("TAREBOOK_LOG_LEVEL", default="WARNING")},
}
