"""Celery: rings for work that stands in the database as job rows.

Its Django side closes database connections around tasks and after a worker forks.
"""

import os

from celery import Celery

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "shop.settings")

app = Celery("tarebook")
app.config_from_object("django.conf:settings", namespace="CELERY")
app.autodiscover_tasks()
