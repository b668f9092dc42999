"""Fill the invented shop in the background; cut off anywhere, it goes on where it stopped."""

from __future__ import annotations

import time
from datetime import date
from typing import Any

from shop.base import clock
from shop.base.errors import NotReady
from shop.base.jobs import JobCancelled, LeaseLost, Running, job_kind
from shop.base.models import Job, Shop
from shop.demo.days import HISTORY_MONTHS
from shop.demo.doing import do_all
from shop.demo.kit import kit_of
from shop.demo.people import SHOP_NAME, WORKERS
from shop.demo.world import SEED, plan

WORD_EVERY = 0.5  # seconds between two words to the screen
# How many steps a whole history has, for the bar; near enough, since the day decides exactly.
STEPS, STEPS_A_MONTH = 420, 100


@job_kind("demo.fill")
def fill(running: Running) -> dict[str, Any]:
    """Do every step of the invented past that isn't done yet.

    Arguments, all of them optional: `today` (else the day on which the job was asked for, so that
    work begun before midnight ends as the same world), `seed`, `months` of history.
    """
    shop = Shop.objects.first()
    if shop is None:
        # It's asked for a moment before the shop is founded: queued again, the sweeper rings for it.
        running.give_back("the shop isn't founded yet")
        raise LeaseLost
    if shop.name != SHOP_NAME:
        raise NotReady("This is a real shop: the demo stays out of it.", code="a real shop")
    asked_on = clock.day_of(Job.objects.values_list("asked_at", flat=True).get(pk=running.id), shop)
    args = running.args
    months = float(args.get("months", HISTORY_MONTHS))
    steps = plan(
        today=date.fromisoformat(args["today"]) if "today" in args else asked_on, kit=kit_of(shop),
        seed=int(args.get("seed", SEED)), history_months=months,
    )
    total, done, said = STEPS + round(STEPS_A_MONTH * months), 0, 0.0
    for step in do_all(steps, shop=shop, key_of=running.act_key):
        done += 1
        if time.monotonic() - said >= WORD_EVERY:
            if running.cancelled():
                raise JobCancelled
            running.progress(min(done, total), total, f"written up to {step.at.astimezone(clock.zone(shop)):%Y-%m-%d}")
            said = time.monotonic()
    running.progress(done, done, "the whole past is written")
    return {"steps": done, "short codes": {worker.name: worker.code for worker in WORKERS}}
