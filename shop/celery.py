"""Celery: rings for work that stands in the database as job rows.

Its Django side closes database connections around tasks and after a worker forks.
"""

import os
import warnings

from celery import Celery
from celery.platforms import SecurityWarning

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "shop.settings")

# It warns whoever runs a worker as root, for the sake of pickled messages; only JSON is accepted here.
warnings.filterwarnings("ignore", category=SecurityWarning)

app = Celery("tarebook")
app.config_from_object("django.conf:settings", namespace="CELERY")
app.autodiscover_tasks()
