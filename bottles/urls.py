"""Every address about bottles; a label carries /b/<code>."""

from __future__ import annotations

from bottles.urls_books import urlpatterns as books
from bottles.urls_counter import urlpatterns as counter
from bottles.urls_leaks import urlpatterns as leaks
from bottles.urls_learning import urlpatterns as learning
from bottles.urls_plan import urlpatterns as plan
from bottles.urls_refill import urlpatterns as refill
from bottles.urls_register import urlpatterns as register

app_name = "bottles"
urlpatterns = [*register, *counter, *books, *refill, *leaks, *learning, *plan]
