"""A plan as the desk reads it: clock times, weights in the person's own units, sentences."""

from __future__ import annotations

from datetime import date, datetime, timedelta
from typing import Any

from django.urls import reverse
from django.utils.safestring import mark_safe

from bottles.models import DayPlanResult
from bottles.selectors.planning import owners_of
from bottles.views.reason_rows import in_own_units
from bottles.views.refill_words import RefillWords
from shop.base import clock
from shop.base.models import Shop
from shop.charts.model import Axis, Chart, Series
from shop.charts.svg import to_svg

CAUSES = {
    "refill.opened": "after the refill of {} was opened",
    "refill.weighed": "after the refill of {}",
    "refill.closed": "after the refill of {}",
    "bottle.checked in": "after {} was checked in",
    "bottle.moved": "after {} was moved",
    "bottle.wanted": "after what {} waits for was changed",
    "bottle.handed over": "after {} was handed over",
    "refill.supply changed": "after the refill of {} went on from another supply bottle",
    "refill.waits": "after the refill of {} was set to wait, or to go on",
    "bottle.weighed": "after {} was weighed",
    "bottle.used": "after a car used from {}",
    "bottle.vented": "after {} was vented",
    "bottle.delivered": "after {} came from the supplier",
    "bottle.given back": "after {} went back to the supplier",
    "supply.connected": "after {} was connected",
    "supply.taken off": "after {} was taken off its station",
    "movement.reversed": "after a movement was reversed",
    "weighing.struck": "after a weighing of {} was struck",
}
WHY = {
    "no supply": "There is no supply bottle that can be counted on. Weigh one, or order.",
    "no station": "There is no station with a scale. A manager sets one up.",
    "too warm": (
        "No supply bottle stands above it in pressure as warm as it is, and there's no freezer. Chill it, or use a fuller supply."
    ),
    "supply weak": "No supply bottle stands above it in pressure, chilled or not. Order.",
    "no time": "The day's hours don't take it: hoses, people or the freezer are taken. Fill it tomorrow.",
    "supply used": "What the others leave in the supply bottles doesn't go over. Order.",
    "supply used, warm": "What the others leave in the supply bottles doesn't go over as warm as it is. Chill it, or order.",
}


class PlanWords:
    """One result, told."""

    def __init__(self, kept: DayPlanResult, words: RefillWords, shop: Shop) -> None:
        self.kept, self.words, self.shop = kept, words, shop
        self.told: dict[str, Any] = kept.result
        told = self.told
        self._owners = owners_of([one["bottle"] for name in ("fills", "unfilled", "left_out") for one in told[name]])
        self.zone = clock.zone(shop)
        self.zero = datetime.fromisoformat(self.told["zero"])
        began = self.zero.astimezone(self.zone)
        self._zero_h = began.hour + began.minute / 60.0

    def page(self) -> dict[str, Any]:
        """Everything that the page shows of it."""
        told = self.told
        return {
            "made": f"{self.kept.made_at.astimezone(self.zone):%H:%M}", "after": self._cause(), "counted": self._counted(),
            "broken": self._broken(), "being_filled": told.get("being_filled", []),
            "proven": self._proven(), "promises": self._promises(), "fills": [self._fill(one) for one in told["fills"]],
            "unfilled": [self._unfilled(one) for one in told["unfilled"]],
            "left_out": [
                one | {"sentence": in_own_units(one["sentence"], self.words), "url": _of(one["bottle"]), "owner": self._owner(one)}
                for one in told["left_out"]
            ],
            "not_weighed": told["not_weighed"], "not_counted": [self._not_counted(one) for one in told["not_counted"]],
            "sources": self._sources(), "empties": [self._empty(one) for one in told["empties"]], "order": self._order(),
            "pumped": told["pumped"], "is_prior": told["is_prior"], "room": self.words.temperature(told["room_mk"]),
            "colds": [self._cold(cold) for cold in told["colds"]],
            "good_enough": f"{told['good_per_mille'] / 10:g} %", "warming": self._warming(),
        }  # fmt: skip

    def _at(self, seconds: int) -> str:
        return f"{(self.zero + timedelta(seconds=seconds)).astimezone(self.zone):%H:%M}"

    def _hours(self, seconds: int) -> float:
        """Hours since midnight, for an axis; past the next one they count on."""
        return self._zero_h + seconds / 3600.0

    def _cause(self) -> str:
        cause = self.told.get("cause", {})
        return CAUSES.get(cause.get("why", ""), "").format(cause.get("bottle", ""))

    def _counted(self) -> str:
        told = self.told
        if not told["count"]:
            return "No bottle waits that may be filled."
        said = f"{told['good']} of {told['count']} good enough"
        most = min(told["most_good"], told["count"])
        if told["good"] >= most:
            return f"{said}; no plan can do more." if told["good"] < told["count"] else f"{said}."
        return f"{said}; this is the best plan." if told["exact"] else f"{said}; no plan can do more than {most}."

    def _broken(self) -> str:
        told = self.told
        promised = sum(one["promised_s"] is not None for one in (*told["fills"], *told["unfilled"]))
        if not promised or not told["broken"]:
            return "Every promise is kept." if promised else ""
        many = "The only promise will break" if promised == 1 else f"{told['broken']} of {promised} promises will break"
        return f"{many}; no plan can keep more." if told["broken"] == told["least_broken"] else f"{many}."

    def _cold(self, cold: dict[str, Any]) -> str:
        said = f"{cold['name']} at {self.words.temperature(cold['mk'])}, {cold['takes']} at once"
        return f"{said} ({cold['taken']} of them not in this plan)" if cold.get("taken") else said

    def _proven(self) -> str:
        told = self.told
        if not told["looked_at"]:
            return ""
        if told["exact"]:
            return f"Every order and every way of filling was looked at ({told['looked_at']} partial plans): no plan is better."
        least = told["least_broken"]
        kept = f"at least {least} must break" if least else "none of them need break"
        return (
            f"{told['looked_at']} partial plans were looked at and the best one taken. Of the promises {kept}, "
            f"and no plan makes more than {told['most_good']} good enough; a better one than this may exist."
        )

    def _promises(self) -> list[dict[str, Any]]:
        rows = [self._promise(one, filled=True) for one in self.told["fills"] if one["promised_s"] is not None]
        rows += [self._promise(one, filled=False) for one in self.told["unfilled"] if one["promised_s"] is not None]
        return sorted(rows, key=lambda row: (row["kind"] == "yes", row["promised_s"], row["code"]))

    def _promise(self, one: dict[str, Any], *, filled: bool) -> dict[str, Any]:
        breaks = []
        if filled and one["late_s"]:
            minutes = -(-one["late_s"] // 60)
            breaks.append(f"{_minutes(minutes)} late")
        if one["short_g"]:
            breaks.append(f"{self.words.mass(one['short_g'])} short of good enough")
        if not filled:
            breaks.insert(0, "not filled today")
        done = f"done {self._at(one['draws'][-1]['until_s'])}" if filled else ""
        unsure = one.get("low_short_g", 0) if filled and not breaks else 0
        if unsure:
            done = f"{done}, may end {self.words.small(unsure)} short of good enough"
        return {
            "code": one["bottle"], "url": _of(one["bottle"]), "owner": self._owner(one), "promised_s": one["promised_s"],
            "promised": self._at(one["promised_s"]), "kind": "no" if breaks else "after" if unsure else "yes",
            "word": ("Late already" if one["promised_s"] < 0 else "Will break") if breaks else "Likely kept" if unsure else "Kept",
            "how": ", ".join([part for part in (done, *breaks) if part]),
        }  # fmt: skip

    def _fill(self, one: dict[str, Any]) -> dict[str, Any]:
        words, draws = self.words, one["draws"]
        percent = round(100 * one["final_g"] / one["target_g"])
        span, likely = words.span(one["low_g"], one["high_g"]), words.mass(one["final_g"])
        return {
            "code": one["bottle"], "url": _of(one["bottle"]), "owner": self._owner(one), "at": self._at(draws[0]["from_s"]),
            "until": self._at(draws[-1]["until_s"]), "chill": self._chill(one),
            "goes_on": one["goes_on"], "why": [self._why(one, draw) for draw in one["draws"] if draw["quick_g"] is not None],
            "kind": "yes" if one["good"] else "after", "word": f"{percent} % of target",
            "holds": f"{likely}{'' if span == likely else f' ({span})'} of {words.mass(one['target_g'])}",
            "draws": [
                {
                    "at": self._at(draw["from_s"]), "source": draw["source"], "url": _of(draw["source"]),
                    "station": self.told["stations"][draw["station"]],
                    "moved": words.small(draw["moved_g"]), "changed": draw["changed"],
                }
                for draw in draws
            ],
        }  # fmt: skip

    def _chill(self, one: dict[str, Any]) -> str:
        """Where a bottle is chilled, from when to when, and to what."""
        cold_as = self.words.temperature(one["start_mk"])
        if one["chill_from_s"] is None:
            return f"Cold already, {cold_as}" if one["start_mk"] < self.told["room_mk"] - 2_000 else ""
        name, until = self.told["colds"][one["place"]]["name"], self._at(one["chill_until_s"])
        if one["stands_in"] == one["place"]:
            return f"Leave in {name} until {until}, to {cold_as}"
        return f"Chill in {name} from {self._at(one['chill_from_s'])} to {until}, to {cold_as}"

    def _why(self, one: dict[str, Any], draw: dict[str, Any]) -> str:
        """How a draw's mass came: both ends of it, its limits, and where between them it's expected."""
        words, slow, quick = self.words, draw["slow_g"], draw["quick_g"]
        begins = (
            f"{draw['source']} holds {words.mass(draw['there_g'])} then, at {words.temperature(draw['there_mk'])}; "
            f"the bottle {words.small(draw['held_g'])}, at {words.temperature(draw['bottle_mk'])}."
        )
        likely = round(slow + (quick - slow) * one["figure_milli"] / 1000)
        limits = (
            f"Without a fill limit {words.small(slow)} would go over if it's slow to condense, {words.small(quick)} if it's quick; "
            f"with the condensation figure {one['figure_milli'] / 1000:.2f}, {words.small(likely)}."
        )
        ends = f"Its fill limit ends it at {words.small(draw['moved_g'])}." if likely > draw["moved_g"] + 20 else ""
        return f"{begins} {limits} {ends}".strip()

    def _unfilled(self, one: dict[str, Any]) -> dict[str, Any]:
        best = ""
        if one["best_g"] > one["start_g"] and one["why"] not in ("no supply", "no station"):
            best = f"Alone and first it would come to some {round(100 * one['best_g'] / one['target_g'])} % of its target."
        return {
            "code": one["bottle"], "url": _of(one["bottle"]), "owner": self._owner(one), "why": WHY[one["why"]], "best": best,
        }  # fmt: skip

    def _owner(self, one: dict[str, Any]) -> str:
        return self._owners.get(one["bottle"], "")

    def _not_counted(self, one: dict[str, Any]) -> dict[str, Any]:
        """Why a supply bottle isn't counted on, what it holds at least, and how to change that."""
        why = in_own_units(one["why"], self.words)
        if one["least_g"] is not None:
            read_at = datetime.fromisoformat(one["read_at"]).astimezone(self.zone)
            why = (
                f"Known by its gauge alone, read {read_at:%a} {read_at.day} {read_at:%b %H:%M}: it holds at least "
                f"{self.words.mass(one['least_g'])}, if that was vapour only, and may hold more. Weigh it, then it's counted on."
            )
        return {"code": one["code"], "url": _of(one["code"]), "why": why}

    def _sources(self) -> dict[str, Any]:
        """The supplies running down: a table of each draw, and the same as a chart."""
        words, rows, lines, untouched = self.words, [], [], []
        unit = words.units.mass if words.units.mass == "kg" else "lb"
        size = 1000.0 if unit == "kg" else 453.59237
        for one in self.told["sources"]:
            if one["end_g"] == one["net_g"]:
                untouched.append(f"{one['code']} ({words.mass(one['net_g'])})")
                continue
            rows.append([one["code"], "now", words.mass(one["net_g"]), words.pressure(one["pa"]), words.temperature(one["mk"])])
            points: list[tuple[float, float]] = [(self._hours(0), one["net_g"] / size)]
            for filled in self.told["fills"]:
                for draw in filled["draws"]:
                    if draw["source"] == one["code"]:
                        rows.append([
                            one["code"], f"{self._at(draw['until_s'])}, after {filled['bottle']}", words.mass(draw["left_g"]),
                            words.pressure(draw["left_pa"]), words.temperature(draw["left_mk"]),
                        ])  # fmt: skip
                        points.append((self._hours(draw["until_s"]), draw["left_g"] / size))
            lines.append(Series(one["code"], sorted(points), kind="step"))
        chart = Chart("Supply bottles running down", Axis("Time of day", "h"), Axis("Nitrous", unit, low=0.0), lines)
        return {
            "caption": "Supply bottles running down", "rows": rows,
            "head": ["Supply bottle", "When", "Holds", "Gauge", "Temperature"],
            "svg": mark_safe(to_svg(chart, id="plan-chart")) if lines else "",
            "untouched": untouched,
        }  # fmt: skip

    def _empty(self, one: dict[str, Any]) -> dict[str, Any]:
        words = self.words
        return {
            "code": one["code"], "url": _of(one["code"]), "holds": words.mass(one["holds_g"]), "gauge": words.pressure(one["pa"]),
            "below": words.temperature(one["below_mk"]) if one["below_mk"] else "",
            "could": [f"{each['bottle']} at {words.temperature(each['mk'])}: {words.small(each['g'])}" for each in one["could"]],
            "filled": bool(one["could"]) and all(each["filled"] for each in one["could"]),
        }  # fmt: skip

    def _order(self) -> dict[str, str]:
        words, order = self.words, self.told["order"]
        if not order["usable_g"]:
            return {"head": "Order today", "how": "Nothing can be drawn as liquid from the supply bottles that can be counted on."}
        there = words.mass(order["usable_g"], plus_minus_g=order["error_g"])
        usable = f"About {there} can still be drawn as liquid from the supply bottles on hand"
        pace = order["pace"]
        if pace is None:
            return {"head": "No order day can be given", "how": f"{usable}. Too little was filled in recent weeks to tell a pace."}
        told = f"{words.mass(pace['grams'], plus_minus_g=pace['error_g'])} an open day, from {pace['days']} open days"
        less = order["order_by_if_less"]
        if_less = ""
        if less is not None and less != order["order_by"]:
            if_less = (
                f" Were there {words.mass(order['error_g'])} less, which weights and books don't rule out, the last day to order "
                f"would be {_day(date.fromisoformat(less))}. Weigh the supply bottles to know better."
            )
        if order["order_by"] is None:
            return {"head": "No need to order yet", "how": f"{usable}. At {told}, it lasts for longer than a year.{if_less}"}
        today = clock.today(self.shop)
        by, likely, soonest = (date.fromisoformat(order[name]) for name in ("order_by", "lasts_until", "soonest"))
        head = "Order today" if by <= today else f"Order by {_day(by)}"
        until = _day(likely)
        early = "" if soonest == likely else f", at the soonest {_day(soonest)}"
        lead = f"the supplier takes {order['lead_days']} days"
        return {"head": head, "how": f"{usable}. At {told}, that lasts until {until}{early}; {lead}.{if_less}"}

    def _warming(self) -> str:
        hours = sorted(one["warming_s"] / 3600 for one in self.told["sources"])
        if not hours:
            return ""
        return f"{hours[0]:.1f} h" if f"{hours[0]:.1f}" == f"{hours[-1]:.1f}" else f"{hours[0]:.1f} to {hours[-1]:.1f} h"


def _of(code: str) -> str:
    return reverse("bottles:bottle", args=[code])


def _day(day: date) -> str:
    return f"{day:%A} {day.day} {day:%b}"


def _minutes(minutes: int) -> str:
    if minutes < 90:
        return f"{minutes} min"
    hours, rest = divmod(minutes, 60)
    return f"{hours} h {rest} min" if rest else f"{hours} h"
