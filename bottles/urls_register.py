"""Addresses of the register: what a bottle is, its tare, stamps, owner and conditions."""

from __future__ import annotations

from django.urls import path

from bottles.views import bottle, conditions, owners, registering, stamps, tares

urlpatterns = [
    path("bottles/", bottle.bottles, name="bottles"),
    path("bottles/register", registering.NewBottle.as_view(), name="register"),
    path("b/<str:code>", bottle.bottle, name="bottle"),
    path("b/<str:code>/history", bottle.history, name="history"),
    path("b/<str:code>/edit", registering.ChangeBottle.as_view(), name="edit"),
    path("b/<str:code>/tare", tares.NewTare.as_view(), name="tare"),
    path("b/<str:code>/stamps", stamps.NewStamp.as_view(), name="stamps"),
    path("b/<str:code>/stamps/<int:pk>/strike", stamps.StrikeStamp.as_view(), name="strike_stamp"),
    path("b/<str:code>/owner", owners.NewOwner.as_view(), name="owner"),
    path("b/<str:code>/condition", conditions.NoteCondition.as_view(), name="condition"),
    path("b/<str:code>/condition/<int:pk>/end", conditions.EndCondition.as_view(), name="end_condition"),
    path("b/<str:code>/condemn", conditions.Condemn.as_view(), name="condemn"),
    path("b/<str:code>/retire", conditions.Retire.as_view(), name="retire"),
]
