"""Address of the leak watch."""

from __future__ import annotations

from django.urls import path

from bottles.views import leaks

urlpatterns = [path("nitrous/leaks", leaks.leaks, name="leaks")]
