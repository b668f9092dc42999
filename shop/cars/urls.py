"""Addresses about cars."""

from django.urls import path

from shop.cars import views

app_name = "cars"

urlpatterns = [
    path("cars", views.cars, name="cars"),
    path("cars/new", views.CarNew.as_view(), name="car_new"),
    path("cars/<int:pk>/change", views.CarChange.as_view(), name="car_change"),
]
