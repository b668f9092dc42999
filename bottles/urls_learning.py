"""Address of what the shop learned from its refills."""

from __future__ import annotations

from django.urls import path

from bottles.views import learning

urlpatterns = [path("learning", learning.learning, name="learning")]
