"""Addresses of the scale and the books."""

from __future__ import annotations

from django.urls import URLPattern, path

from bottles.views import moving, nitrous, scales, weighing

urlpatterns: list[URLPattern] = [
    path("b/<str:code>/weigh", weighing.Weigh.as_view(), name="weigh"),
    path("weighings/<int:pk>/strike", weighing.Strike.as_view(), name="strike_weighing"),
    path("b/<str:code>/deliver", moving.Deliver.as_view(), name="deliver"),
    path("b/<str:code>/return", moving.GiveBack.as_view(), name="give_back"),
    path("b/<str:code>/use", moving.Use.as_view(), name="use"),
    path("b/<str:code>/vent", moving.Vent.as_view(), name="vent"),
    path("scales/", scales.scales, name="scales"),
    path("scales/add", scales.ScaleNew.as_view(), name="scale_add"),
    path("scales/<int:pk>/change", scales.ScaleChange.as_view(), name="scale_change"),
    path("scales/<int:pk>/check", scales.ScaleCheck.as_view(), name="scale_check"),
    path("nitrous", nitrous.balance, name="balance"),
    path("nitrous/movements/<int:pk>", nitrous.movement, name="movement"),
    path("nitrous/movements/<int:pk>/reverse", nitrous.Reverse.as_view(), name="reverse_movement"),
    path("nitrous/stock-take", nitrous.stock_take, name="stock_take"),
]
