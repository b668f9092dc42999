"""The manager's books: the balance between two days, what is unaccounted for, one movement, stock-take."""

from __future__ import annotations

import uuid
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.forms.moving import ReverseForm
from bottles.forms.nitrous import DaysForm, SinceForm
from bottles.models import Delivery, Line, Movement
from bottles.rules.tares import together
from bottles.selectors.books import balance_between, day_start
from bottles.selectors.stock import Stocked, stock_of_the_shop
from bottles.selectors.unaccounted import unaccounted_between
from bottles.services.moving import reverse_movement
from bottles.views.holding_words import account_words, at, signed
from bottles.views.moving import delivery_words
from bottles.views.refill_words import RefillWords, refill_words
from shop.base import clock
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, MANAGERS, allow
from shop.people.acting import ActView
from shop.people.models import User, full_name

LATEST = 50


@allow(MANAGERS, room="office")
def balance(request: HttpRequest) -> HttpResponse:
    """The shop's nitrous between two days, what isn't accounted for, the latest movements."""
    shop = Shop.objects.get()
    words = refill_words(request, shop)
    form = DaysForm(request.GET or None, zone=clock.zone(shop), today=clock.today(shop))
    first, last, known_at = form.span()
    told = balance_between(first, last, shop=shop, known_at=known_at)
    if not form.is_bound:
        form = DaysForm(initial={"first": first, "last": last}, zone=clock.zone(shop), today=clock.today(shop))
    rows = [[f"stock when {first} began", words.mass(told.opening_g), f"±{words.mass(told.opening_error_g)}", "", ""]]
    rows += [
        [flow.words, signed(flow.net_g, words), f"±{words.mass(flow.error_g)}", words.mass(flow.into_g), words.mass(flow.out_g)]
        for flow in told.flows
    ]
    context = {
        "form": form,
        "head": ["What", "Nitrous", "±", "into bottles", "out of bottles"],
        "rows": rows,
        "foot": [f"stock when {last} ended", words.mass(told.closing_g), f"±{words.mass(told.closing_error_g)}", "", ""],
        "caption": f"Nitrous from {first} to {last}" + (f", as known at {at(known_at, shop)}" if known_at else ""),
        "sums": told.difference_g == 0 and told.all_accounts_g == 0,
        "difference": words.mass(told.difference_g or told.all_accounts_g),
        "filled": words.mass(told.filled_g),
        "missing": [_missing(one, words, shop) for one in unaccounted_between(first, last, shop=shop)],
        "movements": [_movement_row(movement, words, shop) for movement in _latest()],
    }
    return render(request, "bottles/balance.html", context)


@allow(EVERYONE, room="counter")
def stock_take(request: HttpRequest) -> HttpResponse:
    """Every bottle that is in: weigh each, see what is left to weigh."""
    shop = Shop.objects.get()
    words = refill_words(request, shop)
    today = clock.today(shop)
    form = SinceForm(request.GET or None)
    since = form.day(today)
    if not form.is_bound:
        form = SinceForm(initial={"since": since})
    stock = stock_of_the_shop(day_start(since, shop))
    known = [row.holding for row in stock if row.holding.grams is not None]
    context = {
        "form": form,
        "since": since,
        "rows": [_stock_row(row, words, shop) for row in stock],
        "count": len(stock),
        "left": sum(not row.weighed_since for row in stock),
        "unknown": len(stock) - len(known),
        "total": words.mass(
            sum(holding.grams or 0 for holding in known),
            plus_minus_g=together(holding.error_g for holding in known),
        ),
        "books": words.mass(sum(row.holding.books_g for row in stock)),
    }
    return render(request, "bottles/stock_take.html", context)


@allow(MANAGERS, room="office")
def movement(request: HttpRequest, pk: int) -> HttpResponse:
    """One movement with its lines, its delivery's ticket, its reversal."""
    shop = Shop.objects.get()
    words = refill_words(request, shop)
    found = _found(pk)
    delivery = Delivery.objects.filter(movement=found).select_related("weighing").first()
    reversal = Movement.objects.filter(reverses=found).select_related("act__person").first()
    bottles = {account.bottle for line in found.lines.all() for account in (line.source, line.target) if account.bottle}
    context = {
        "movement": found,
        "heading": f"{found.get_kind_display().capitalize()}, {at(found.happened_at, shop)}",
        "recorded": at(found.act.recorded_at, shop),
        "person": full_name(found.act.person),
        "head": ["From", "To", "Nitrous", "Origin"],
        "rows": [
            [account_words(line.source), account_words(line.target), _mass(line, words), line.get_origin_display()]
            for line in found.lines.all()
        ],
        "bottles": sorted(bottles, key=lambda bottle: bottle.code),
        "delivery": delivery_words(delivery, words) if delivery else "",
        "lot": delivery.lot if delivery else "",
        "weighing": found.weighing,
        "struck": bool(found.weighing and hasattr(found.weighing, "strike")),
        "reversal": reversal,
        "reversal_person": full_name(reversal.act.person) if reversal else "",
        "may_reverse": reversal is None and found.reverses_id is None and found.weighing_id is None,
    }
    return render(request, "bottles/movement.html", context)


class Reverse(ActView):
    """Reverse a movement, once."""

    roles = MANAGERS
    room = "office"
    form_class = ReverseForm
    submit = "Reverse it"
    said = "Reversed. Both stay to be seen."
    movement: Movement

    def find(self, **kwargs: Any) -> None:
        self.movement = _found(kwargs["pk"])

    def context(self) -> dict[str, Any]:
        words = refill_words(self.request, self.shop)
        lines = "; ".join(_line(line, words) for line in self.movement.lines.all())
        return {
            "heading": "Reverse a movement",
            "intro": f"{self.movement.get_kind_display().capitalize()}, {at(self.movement.happened_at, self.shop)}: {lines}. "
            "What later weighings said keeps its word.",
            "back_url": self.first_page(None),
        }

    def first_page(self, act: Any) -> str:
        return reverse("bottles:movement", args=[self.movement.pk])

    def act(self, form: ReverseForm, person: User, key: uuid.UUID) -> str:
        reverse_movement(key=key, person=person, movement=self.movement, reason=form.cleaned_data["reason"])
        return self.first_page(None)


def _found(pk: int) -> Movement:
    found = (
        Movement.objects.filter(pk=pk)
        .select_related("act__person", "weighing__strike", "weighing__bottle")
        .prefetch_related(
            "lines__source__bottle", "lines__source__customer", "lines__source__car", "lines__target__bottle",
            "lines__target__customer", "lines__target__car",
        )
        .first()
    )
    if found is None:
        raise Http404("There is no such movement.")
    return found


def _latest() -> list[Movement]:
    return list(
        Movement.objects.select_related("act__person", "reversal")
        .prefetch_related(
            "lines__source__bottle", "lines__source__customer", "lines__source__car", "lines__target__bottle",
            "lines__target__customer", "lines__target__car",
        )
        .order_by("-happened_at", "-id")[:LATEST]
    )


def _movement_row(found: Movement, words: RefillWords, shop: Shop) -> dict[str, Any]:
    lines: list[Line] = list(found.lines.all())
    reversed_by = getattr(found, "reversal", None)
    return {
        "url": reverse("bottles:movement", args=[found.pk]),
        "when": at(found.happened_at, shop),
        "what": found.get_kind_display() + (", reversed" if reversed_by else ""),
        "lines": [_line(line, words) for line in lines],
        "person": full_name(found.act.person),
        "note": found.note,
    }


def _line(line: Line, words: RefillWords) -> str:
    return f"{words.mass(line.grams)} from {account_words(line.source)} to {account_words(line.target)}"


def _mass(line: Line, words: RefillWords) -> str:
    return words.mass(line.grams, plus_minus_g=line.error_g or None)


def _missing(one: Any, words: RefillWords, shop: Shop) -> dict[str, Any]:
    return {
        "bottle": one.bottle,
        "bottle_url": reverse("bottles:bottle", args=[one.bottle]),
        "url": reverse("bottles:movement", args=[one.movement_id]),
        "amount": f"{words.mass(abs(one.grams), plus_minus_g=one.error_g or None)} {'short' if one.grams > 0 else 'over'}",
        "when": at(one.happened_at, shop),
        "since": at(one.since, shop) if one.since else "never weighed before",
        "persons": ", ".join(one.persons) or "nobody by the books",
        "reason": one.reason,
    }


def _stock_row(row: Stocked, words: RefillWords, shop: Shop) -> dict[str, Any]:
    holding, custody = row.holding, row.standing.custody
    return {
        "code": row.bottle.code,
        "url": row.bottle.get_absolute_url(),
        "weigh_url": reverse("bottles:weigh", args=[row.bottle.code]) + "?step=stocktake",
        "where": str(custody.place) if custody and custody.place else "in the shop",
        "holds": "unknown" if holding.grams is None else words.mass(holding.grams, plus_minus_g=holding.error_g or None),
        "origin": holding.origin,
        "weighed": at(holding.weighed_at, shop) if holding.weighed_at else "never",
        "books": words.mass(holding.books_g),
        "done": row.weighed_since,
    }
