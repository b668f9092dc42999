"""The Counter's pages beside bare ones, and their questions to the database, which don't grow with the shop."""

from __future__ import annotations

from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from bottles.models import Weighing
from bottles.services import refill_steps
from shop.base import clock
from tests import factories
from tests.benchmarks.bare import Visitor, lay, lay_filled, lay_list
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import in_turn
from tests.bottles.of_refill import TARE_G, Works, degrees, key

pytestmark = [pytest.mark.benchmark, pytest.mark.django_db, pytest.mark.urls("tests.benchmarks.bare")]

FEW, MANY = 5, 50
ROUNDS, CALLS = 11, 3
OF_THE_FRAME, OF_CHOICES = 3, 2  # queries: who asks, and the shop; what a form's lists offer
TYPED = {
    "gauge": "49.5 bar", "supply_temperature": "20 °C", "taken": "wall", "bottle_temperature": "-12 °C",
    "bottle_taken": "wall", "bottle_weight": f"{TARE_G + 300} g", "start": "weighed", "method": "chilled",
}  # fmt: skip


class World:
    """A shop with a bottle being filled and as many waiting as wanted."""

    def __init__(self, shop: Any, person: Any, client: Client) -> None:
        self.works = Works(shop, person)
        self.client = client
        self.waiting: list[Any] = []
        self.refill = self.works.open(self.works.bottle_to_fill("T-0100"))
        self.visitor = Visitor(client)

    def let_wait(self, many: int) -> World:
        shelf = factories.PlaceFactory()
        while len(self.waiting) < many:
            number = len(self.waiting)
            bottle = factories.BottleFactory(code=f"T-{2000 + number}", wall="aluminium", dip_tube="dip", last_held="nitrous")
            for kind, year in (("made", 2018), ("test", 2024)):
                factories.StampFactory(bottle=bottle, kind=kind, year=year, month=1 + number % 12)
            customer = factories.CustomerFactory()
            factories.ConsentFactory(customer=customer)
            factories.owned(bottle, customer)
            factories.weighed(bottle, gross_g=TARE_G + 100 * (number % 40), tare_g=TARE_G, scale=self.works.scale)
            factories.placed(bottle, "in", place=shelf, wanted="fill", promised_at=clock.now())
            self.waiting.append(bottle)
        return self

    def addresses(self) -> dict[str, str]:
        code = self.works.bottle.code
        return {
            "Counter": reverse("rooms:counter"),
            "bottles, page of 50": reverse("bottles:bottles"),
            "a bottle's page": reverse("bottles:bottle", args=[code]),
            "weigh": reverse("bottles:weigh", args=[code]),
            "fill": reverse("bottles:fill", args=[code]),
            "an open refill": reverse("bottles:refill", args=[self.refill.pk]),
        }

    @property
    def live(self) -> tuple[str, dict[str, str]]:
        return reverse("bottles:forecast_live", args=[self.works.bottle.code]), TYPED | {"supply": str(self.works.supply.pk)}

    def listed(self, address: str) -> dict[str, Any]:
        """What a list's template is filled with, its page number apart, as words."""
        context = self.client.get(address).context
        found = {name: context[name] for name in ("rows", "asked", "narrowed", "filters", "refills", "waiting", "here",
                                                   "supplies", "has_stations") if name in context}  # fmt: skip
        page = context.get("page")
        if page is not None:
            found["page"] = {
                "has_other_pages": page.has_other_pages(), "has_previous": page.has_previous(), "has_next": page.has_next(),
                "start_index": page.start_index(), "end_index": page.end_index(),
                "next_page_number": page.next_page_number() if page.has_next() else None,
                "paginator": {"count": page.paginator.count},
            }  # fmt: skip
        return found


@pytest.fixture
def world(shop: Any, front_desk: Any, client_of: Callable[..., Client]) -> World:
    return World(shop, front_desk, client_of(front_desk))


def test_a_page_of_fifty_rows_beside_the_same_rows_ready(world: World, tell: Told) -> None:
    ask = world.let_wait(MANY).visitor.ask
    lists = {"Counter": "rooms/counter.html", "bottles, page of 50": "bottles/bottles.html"}
    for name, template in lists.items():
        address = world.addresses()[name]
        page = ask(address).content.decode()
        bare = lay_list(template.rpartition("/")[2], template, world.listed(address))
        assert ask(bare).content.decode().count("<a class=\"code\"") == page.count("<a class=\"code\"") >= MANY
        measured = in_turn({"page": lambda a=address: ask(a), "bare": lambda b=bare: ask(b)}, rounds=ROUNDS, calls=CALLS)
        tell(name, measured, "page", beside="bare", goal=2)


@pytest.mark.parametrize("name", ["a bottle's page", "weigh", "fill", "an open refill"])
def test_a_page_of_one_thing_beside_its_template_filled_at_once(name: str, world: World, tell: Told) -> None:
    ask = world.visitor.ask
    address = world.addresses()[name]
    filled = lay_filled("filled", world.client.get(address))
    text = lay("text", ask(address))
    assert len(ask(text).content) > 0.9 * len(ask(address).content)
    assert 0.9 * len(ask(address).content) < len(ask(filled).content)
    assert asked_for(lambda: ask(filled)) <= OF_THE_FRAME + OF_CHOICES
    measured = in_turn(
        {"page": lambda: ask(address), "bare": lambda: ask(filled), "its text": lambda: ask(text)}, rounds=ROUNDS, calls=CALLS
    )
    tell(name, measured, "page", beside="its text")
    tell(name, measured, "page", beside="bare", goal=3)


LEARNED_FROM, STORED = 25, 500


def test_what_was_learned_and_what_leaks_beside_the_bare_page(world: World, tell: Told) -> None:
    works = world.works
    for number in range(LEARNED_FROM):
        bottle, supply = works.bottle_to_fill(f"T-{7000 + number}"), works.connected(f"S-{7000 + number}")
        refill, weight = works.open(bottle, supply, bottle_temperature=degrees("5 °C")), works.weight(2_000 + number)
        refill_steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=weight, ended_by="flow ceased")
    weeks_stored(works.scale)
    ask = world.visitor.ask
    pages = {"learning, 25 refills": ("learning", "T-7001"), "leak watch, 500 bottles": ("leaks", "Z-0001")}
    for name, (url, row) in pages.items():
        address = reverse(f"bottles:{url}")
        page = ask(address).content.decode()
        assert row in page
        bare = lay_filled("page", world.client.get(address))
        assert 0.9 * len(page) < len(ask(bare).content)
        measured = in_turn({"page": lambda a=address: ask(a), "bare": lambda b=bare: ask(b)}, rounds=ROUNDS, calls=CALLS)
        tell(name, measured, "page", beside="bare")


def weeks_stored(scale: Any) -> None:
    """Many bottles that were only weighed, once a week."""
    place, times = factories.PlaceFactory(), [factories.THEN + timedelta(weeks=week) for week in range(4)]
    for number in range(STORED):
        bottle = factories.BottleFactory(code=f"Z-{number:04}")
        tare = factories.weighed(bottle, gross_g=TARE_G + 4_000, tare_g=TARE_G, scale=scale).tare
        Weighing.objects.bulk_create([
            Weighing(act=bottle.act, bottle=bottle, scale=scale, tare=tare, step="stored", gross_g=TARE_G + 4_000 - number % 3,
                     typed="as read", net_g=4_000 - number % 3, error_g=28, happened_at=at)
            for at in times[1:]
        ])  # fmt: skip
        factories.placed(bottle, "in", place=place)


SHORT = {"bottle_temperature": "15 °C", "method": "pressure"}  # pressure alone doesn't fill it: what would help is worked out


@pytest.mark.parametrize(("what", "changes"), [("the forecast while typing", {}), ("the same, a short fill", SHORT)])
def test_the_forecast_while_typing_beside_the_bare_page(
    what: str, changes: dict[str, str], world: World, tell: Told
) -> None:  # fmt: skip
    ask = world.visitor.ask
    address, typed = world.live
    typed |= changes
    answer = ask(address, typed)
    said = answer.content.decode()
    assert "Goes over:" in said and (not changes or "Would help" in said)
    page = lay_filled("page", world.client.post(world.addresses()["fill"], typed | {"forecast": "yes"}))
    text = lay("text", answer, part=True)
    measured = in_turn(
        {"answer": lambda: ask(address, typed), "bare": lambda: ask(page), "its text": lambda: ask(text)},
        rounds=ROUNDS, calls=CALLS,
    )  # fmt: skip
    tell(what, measured, "answer", beside="its text")
    tell(what, measured, "answer", beside="bare", goal=3)


def test_the_course_that_is_opened_beside_the_bare_page(world: World, tell: Told) -> None:
    ask = world.visitor.ask
    address, typed = reverse("bottles:course_live", args=[world.works.bottle.code]), world.live[1] | SHORT
    assert "Nine tenths" in ask(address, typed).content.decode()
    page = lay_filled("page", world.client.post(world.addresses()["fill"], typed | {"course": "yes"}))
    measured = in_turn({"answer": lambda: ask(address, typed), "bare": lambda: ask(page)}, rounds=ROUNDS, calls=CALLS)
    tell("the course, opened", measured, "answer", beside="bare")


def test_no_page_asks_the_database_more_often_in_a_fuller_shop(world: World) -> None:
    def asked() -> dict[str, int]:
        pages = {name: (address, None) for name, address in world.addresses().items()} | {"while typing": world.live}
        for visit in pages.values():
            world.visitor.ask(*visit)
        return {name: asked_for(lambda v=visit: world.visitor.ask(*v)) for name, visit in pages.items()}

    world.let_wait(FEW)
    few = asked()
    world.let_wait(MANY)
    assert asked() == few


def asked_for(job: Callable[[], Any]) -> int:
    """How often a job asks the database."""
    with CaptureQueriesContext(connection) as queries:
        job()
    return len(queries)
