"""What the pages with a forecast share: the two bottles judged, the forecast worked out, its part of the page."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import Any

from django.http import HttpRequest

from bottles.forms.filling import NEEDED, READ, ReadingsForm
from bottles.models import Bottle, Station, Supply
from bottles.rules.fitness import Judgement
from bottles.selectors.filling_offers import supplies_offered
from bottles.selectors.judging import Rulebook, rulebook
from bottles.services.forecast_details import forecast_by
from bottles.services.forecasting import Answer, Asked
from bottles.services.refilling import refuse_source
from bottles.views.forecast_words import forecast_context, stop_figure
from bottles.views.refill_words import RefillWords
from shop.base.errors import Refusal
from shop.base.models import Shop
from shop.physics.errors import NoSolution, PhysicsError


@dataclass(frozen=True, slots=True)
class Judged:
    """What a page needs judged: the bottle to fill and its supply bottle, at once and by one rulebook."""

    shop: Shop
    book: Rulebook
    supply: Supply | None
    found: dict[int, Judgement]

    @classmethod
    def of(cls, shop: Shop, bottle: Bottle, supply: Supply | None) -> Judged:
        """Judge both, or the one where no supply bottle is connected."""
        book = rulebook(shop)
        return cls(shop, book, supply, book.judge_all([bottle, supply.bottle] if supply else [bottle]))

    def __getitem__(self, bottle: Bottle) -> Judgement:
        """What was judged of a bottle; another than those two is judged now."""
        if bottle.pk not in self.found:
            self.found.update(self.book.judge_all([bottle]))
        return self.found[bottle.pk]


def chosen_supply(
    request: HttpRequest, bottle: Bottle, station: Station | None = None, but: Bottle | None = None
) -> Supply | None:  # fmt: skip
    """The supply bottle that the form or the address names; else the weakest."""
    asked = request.POST.get("supply") or request.GET.get("supply") or ""
    offered = supplies_offered(bottle, station, but)
    found = offered.filter(pk=int(asked)).first() if asked.isdigit() and len(asked) < 18 else None
    return found or offered.first()


def asked_for(bottle: Bottle, supply: Supply, judged: Judged) -> Asked:
    """What a forecast is asked for, with both bottles' limits."""
    return Asked(bottle, supply, judged[bottle].limit.grams or 0, judged[supply.bottle].limit.grams, judged.shop)


@dataclass(frozen=True, slots=True)
class Worked:
    """A forecast worked out from what is typed so far, or why there is none yet."""

    supply: Supply | None = None
    limit_g: int = 0  # what it's filled to
    asked: Asked | None = None
    answer: Answer | None = None
    trouble: list[str] = field(default_factory=list)
    waits: list[str] = field(default_factory=list)


def worked(
    form: ReadingsForm, bottle: Bottle, judged: Judged, *, limit_g: int | None = None, method: str = ""
) -> Worked:  # fmt: skip
    """Work the forecast out; `limit_g` and `method` where a refill was opened with them."""
    limit = limit_g or judged[bottle].limit.grams
    if not limit:
        return Worked(trouble=["This bottle has no fill limit yet. Complete its record first."])
    if not form.is_bound:
        lacking = [name for name in ("supply_temperature", "bottle_temperature") if not form.initial.get(name)]
        return Worked(judged.supply, limit, waits=[NEEDED[name] for name in lacking or ["bottle_weight"]])
    wrong = [
        f"{form.fields[name].label}: {error}"
        for name, errors in form.errors.items()
        if name in READ
        for error in errors
    ]
    readings = form.readings()
    supply = form.cleaned_data.get("supply")
    target = form.cleaned_data.get("target")
    to = min(limit, target.stored) if target else limit
    if readings is None or supply is None or wrong:
        return Worked(supply, to, trouble=wrong, waits=form.missing)
    asked = replace(asked_for(bottle, supply, judged), limit_g=limit)
    try:
        answer = forecast_by(asked, readings, method or form.cleaned_data.get("method") or "")
        return Worked(supply, to, asked, answer)
    except (Refusal, PhysicsError) as refusal:
        sentence = refusal.sentence
        if isinstance(refusal, NoSolution):
            sentence += " Fill by weight without a forecast, with care."
        return Worked(supply, to, trouble=[sentence])


def forecast_part(found: Worked, form: ReadingsForm, bottle: Bottle, judged: Judged, words: RefillWords) -> dict[str, Any]:
    """The variables of the forecast's part: the answer, or what it waits for."""
    if found.asked is None or found.answer is None:
        stop = stop_figure(bottle, found.supply, found.limit_g, words) if found.supply else None
        return {"forecast": None, "stop": stop, "trouble": found.trouble, "waits": found.waits}
    said = forecast_context(found.asked, found.answer, words)
    return {"forecast": said, "stop": None, "also": also_said(form, found.asked.supply, judged)}


PUMPED = (
    "Pumped: the pump goes on to the limit, until the supply's liquid is out, or to the limits of its plate{plate}. "
    "Somebody stays beside it."
)


def also_said(form: ReadingsForm, supply: Supply, judged: Judged) -> list[str]:
    """What stands before the forecast: a supply bottle that may not be emptied, a pump with stops of its own."""
    said = []
    try:
        refuse_source(supply.bottle, judged[supply.bottle])
    except Refusal as refusal:
        said.append(refusal.sentence)
    if form.cleaned_data.get("method") == "pumped":
        note = supply.station.pump_note
        said.append(PUMPED.format(plate=f" ({note})" if note else ""))
    return said
