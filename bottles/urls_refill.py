"""Addresses of stations and refills."""

from __future__ import annotations

from django.urls import path

from bottles.views import filling, joined, refills, stations

urlpatterns = [
    path("stations", stations.stations, name="stations"),
    path("stations/new", stations.StationNew.as_view(), name="station_add"),
    path("stations/<int:pk>", stations.StationChange.as_view(), name="station"),
    path("stations/<int:pk>/connect", stations.Connect.as_view(), name="connect"),
    path("supplies/<int:pk>/take-off", stations.Disconnect.as_view(), name="disconnect"),
    path("b/<str:code>/fill", filling.Fill.as_view(), name="fill"),
    path("b/<str:code>/fill/forecast", filling.forecast_live, name="forecast_live"),
    path("b/<str:code>/fill/course", filling.course_live, name="course_live"),
    path("b/<str:code>/joined", joined.joined, name="joined"),
    path("refills", refills.refills, name="refills"),
    path("refills/<int:pk>", refills.RefillPage.as_view(), name="refill"),
    path("refills/<int:pk>/wait", refills.Wait.as_view(), name="refill_wait"),
    path("refills/<int:pk>/another-supply", refills.AnotherSupply.as_view(), name="refill_supply"),
    path("refills/<int:pk>/close", refills.Close.as_view(), name="refill_close"),
    path("refills/<int:pk>/receipt", refills.receipt, name="receipt"),
]
