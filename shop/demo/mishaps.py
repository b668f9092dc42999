"""What goes wrong in every shop's books: a typing error, a wrong bottle, a leak, an entry made late.

And the bottles that are somewhere else: on a car, on loan, at the test house, another owner's.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from shop.demo.counter import customer
from shop.demo.cylinders import Spec
from shop.demo.names import TEST_HOUSE
from shop.demo.past import Past
from shop.demo.people import BOSS, BOTH
from shop.demo.steps import Step

SHOP_CAR = ("1", "Open")
LOAN_CAR = ("2", "Street")


def in_the_books(past: Past) -> Iterator[Step]:
    """Give a weighing struck, a movement reversed, a vent entered late, a gap that never left the shop."""
    _mistyped(past)
    _wrong_bottle(past)
    _entered_late(past)
    _leaks(past)
    _leaks_now(past)
    yield from past.drain()


def somewhere_else(past: Past) -> Iterator[Step]:
    """Give bottles that are out, and one that was sold and fitted anew."""
    full = past.kit.interval_months
    sent = _stock(past, "T-0236", filled=0.1, made_ago=full - 1)
    past.ago(9, "09:00").hand_over(sent, to=TEST_HOUSE, kind="test")
    lent = _stock(past, "T-0237", filled=0.8)
    past.ago(6, "16:30").hand_over(lent, to="Zuri Achterholm", kind="loan")
    fitted = _stock(past, "T-0238", filled=0.9, use="car")
    past.ago(3, "17:00").hand_over(fitted, to="the shop's test car", kind="car", car=SHOP_CAR)
    customer(past, "Ysolde Brannagh")
    sold = _stock(past, "T-0248", filled=0.5, use="car")
    past.ago(40, "12:00").write("owner.change", by=BOSS.sign_in, bottle=sold, owner="Ysolde Brannagh")
    spec = past.specs[sold]
    parts = [(thing, text) for thing, text in spec.parts(past.kit) if thing != "ring"]
    parts.append(("adapter", past.kit.mass(180)))
    past.ago(38, "12:20").write("tare.start", bottle=sold, parts=parts)
    past.ago(38, "15:00").hand_over(sold, to="Ysolde Brannagh")
    yield from past.drain()


def _mistyped(past: Past) -> None:
    """A weighing typed wrongly, struck, the right one in its place."""
    code = _stock(past, "T-0242", filled=0.4, days=130)
    right = past.reading(code, "BENCH-1")
    past.net_g[code] += 1_800
    wrong = past.reading(code, "BENCH-1")
    past.net_g[code] -= 1_800
    past.ago(120, "11:30").weigh(code, step="stocktake", gross=wrong, reason="more than the books; to be looked at")
    past.later(25).write(
        "weigh.strike", by=BOTH.sign_in, bottle=code, right=right, reason="Typed for another bottle's weight; read again."
    )


def _wrong_bottle(past: Past) -> None:
    """A use written down for the wrong bottle, reversed, and written down for the right one."""
    wrong, right = _stock(past, "T-0243", filled=0.7, days=170), _stock(past, "T-0246", filled=0.8, days=170)
    told: dict[str, Any] = {"car": list(SHOP_CAR), "amount": past.kit.mass(820), "gross": "", "scale": "", "note": "test runs"}
    past.net_g[right] -= 820
    used = past.ago(160, "16:10").write("use", bottle=wrong, **told)
    past.ago(159, "09:20").write(
        "movement.reverse", by=BOSS.sign_in, bottle=wrong, step=used.name, reason=f"It was {right} that was on the car."
    )
    past.later(4).write("use", bottle=right, **told)
    past.ago(150, "17:30").weigh(right, step="stocktake", if_asked="the amount was an estimate")


def _entered_late(past: Past) -> None:
    """A vent that was forgotten: the next weighing finds it short, then it's entered with its own time."""
    code = _stock(past, "T-0244", filled=0.75, days=75)
    past.net_g[code] -= 560
    past.ago(70, "10:00").weigh(code, step="stocktake", reason="short; nobody remembers")
    then = past.days.at(past.days.ago(72), "15:40")
    past.ago(66, "09:15").write(
        "vent", by=BOTH.sign_in, bottle=code, amount=past.kit.mass(560), happened_at=then.isoformat(),
        reason="Let out outdoors before its valve was looked at; entered late.",
    )


def _leaks(past: Past) -> None:
    """A slow leak: within the ± at first, then beyond it."""
    code = _stock(past, "T-0245", filled=0.85, days=210)
    for days, lost_g, reason in ((180, 12, ""), (140, 16, ""), (95, 160, "slow leak at the valve stem; stem packing replaced")):
        past.net_g[code] -= lost_g
        past.ago(days, "17:20").weigh(code, step="stocktake", if_asked=reason or "slow leak suspected")


def _leaks_now(past: Past) -> None:
    """A slow leak that nobody has noted yet: some grams a week, each weighing within the ± of the one before."""
    code = _stock(past, "T-0253", filled=0.8, days=76)
    for days, lost_g in ((62, 27), (48, 25), (34, 28), (20, 26), (6, 27)):
        past.net_g[code] -= lost_g
        past.ago(days, "17:25").weigh(code, step="stored", if_asked="less than at the last weighing; to be watched")


def _stock(past: Past, code: str, *, filled: float, days: int = 240, made_ago: int = 40, use: str = "stock") -> str:
    """Register a bottle of the shop's, have it come in and weigh it."""
    spec = Spec(code, use=use, since_days=days + 30, made_ago=made_ago, visual_ago=25 if made_ago < 40 else 28)
    past.ago(spec.since_days, "10:30").register(spec, net_g=4_500 * filled)
    past.ago(days, "10:30").check_in(code, brought_by="the shop", place="RACK-B")
    past.later(5).weigh(code)
    return code

