"""Addresses of the rooms, of what is found, and of the shop itself."""

from django.urls import path

from shop.rooms import bay, counter, find, home, jobs, keeping, office, things

app_name = "rooms"

urlpatterns = [
    path("", home.home, name="home"),
    path("counter", counter.counter, name="counter"),
    path("bay", bay.bay, name="bay"),
    path("office", office.office, name="office"),
    path("find", find.find, name="find"),
    path("find/matches", find.matches, name="matches"),
    path("customers/<int:pk>", things.customer, name="customer"),
    path("cars/<int:pk>", things.car, name="car"),
    path("settings", keeping.settings, name="settings"),
    path("settings/change", keeping.SettingsChange.as_view(), name="settings_change"),
    path("policies", keeping.policies, name="policies"),
    path("policies/new", keeping.PolicyNew.as_view(), name="policy_new"),
    path("places", keeping.places, name="places"),
    path("places/new", keeping.PlaceNew.as_view(), name="place_new"),
    path("jobs", jobs.job_list, name="jobs"),
    path("jobs/<int:pk>", jobs.job, name="job"),
    path("jobs/<int:pk>/cancel", jobs.cancel, name="job_cancel"),
    path("jobs/check-books", jobs.CheckBooks.as_view(), name="check_books"),
    path("places/<int:pk>", keeping.PlaceChange.as_view(), name="place"),
]
