"""Every address of the shop."""

from django.contrib.auth.decorators import login_not_required
from django.http import HttpRequest, HttpResponse
from django.urls import include, path


@login_not_required
def healthz(request: HttpRequest) -> HttpResponse:
    """Say that the server answers; touches nothing else."""
    return HttpResponse("open\n", content_type="text/plain")


urlpatterns = [
    path("healthz", healthz, name="healthz"),
    path("", include("shop.people.urls")),
    path("", include("shop.cars.urls")),
    path("", include("bottles.urls")),
    path("", include("shop.rooms.urls")),
]
