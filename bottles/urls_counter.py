"""Addresses of where a bottle is and of its judgement."""

from django.urls import path

from bottles.views import custody

urlpatterns = [
    path("b/<str:code>/check-in", custody.CheckIn.as_view(), name="check_in"),
    path("b/<str:code>/move", custody.Move.as_view(), name="move"),
    path("b/<str:code>/wanted", custody.Want.as_view(), name="wanted"),
    path("b/<str:code>/hand-over", custody.HandOver.as_view(), name="hand_over"),
]
