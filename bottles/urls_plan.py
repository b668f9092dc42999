"""Addresses of the day's fill plan."""

from django.urls import path

from bottles.views import planning

urlpatterns = [
    path("plan", planning.plan, name="plan"),
    path("plan/new", planning.PlanNew.as_view(), name="plan_new"),
]
