"""Addresses about people."""

from django.urls import path

from shop.people.views import customers, own, people, signing_in

app_name = "people"

urlpatterns = [
    path("sign-in", signing_in.sign_in, name="sign_in"),
    path("sign-out", signing_in.sign_out, name="sign_out"),
    path("me", own.me, name="me"),
    path("me/units", own.OwnUnits.as_view(), name="own_units"),
    path("me/password", own.OwnPassword.as_view(), name="own_password"),
    path("me/code", own.OwnCode.as_view(), name="own_code"),
    path("people", people.people, name="people"),
    path("people/new", people.PersonNew.as_view(), name="person_new"),
    path("people/<int:pk>", people.Person.as_view(), name="person"),
    path("people/<int:pk>/password", people.PersonPassword.as_view(), name="person_password"),
    path("people/<int:pk>/badge", people.PersonBadge.as_view(), name="person_badge"),
    path("people/<int:pk>/code", people.PersonCode.as_view(), name="person_code"),
    path("customers", customers.customers, name="customers"),
    path("customers/new", customers.CustomerNew.as_view(), name="customer_new"),
    path("customers/<int:pk>/change", customers.CustomerChange.as_view(), name="customer_change"),
    path("customers/<int:pk>/consent", customers.ConsentNew.as_view(), name="consent_new"),
]
