"""What of a bottle's record a forecast needs: what it holds and how surely, its wall, its tube."""

from __future__ import annotations

from dataclasses import dataclass

from bottles.models import Account, Bottle, Scale, Tare
from bottles.physics.venting import INVERTED, LIQUID, UPRIGHT, phase_leaving
from bottles.physics.vessel import wall_heat
from bottles.physics.weighing import net_uncertainty
from bottles.rules.marks import read_mark
from bottles.selectors.history import Spoken, history_of
from bottles.selectors.scales import scale_uncertainty
from shop.base import clock
from shop.base.models import Shop
from shop.physics.units import ambient_pressure

# Common practice, no source: what hangs on a bottle beside its wall, where the tare isn't split;
# what a wall weighs a litre of capacity, where there's no tare.
FITTINGS_G = 700
FITTINGS_SHARE = 5  # a fifth of the tare at most
WALL_G_A_LITRE = {"aluminium": 870, "steel": 1_100}
UNSURE_SCALE_G = 100  # ± of a weight read on a scale that isn't in the book


@dataclass(frozen=True, slots=True)
class Known:
    """What a bottle holds by its books, and whether a scale said so since anything moved."""

    grams: int | None
    error_g: int
    still_as_weighed: bool
    tare: Tare | None

    def error_on(self, scale: Scale | None) -> int:
        """The ± of a net weighed now."""
        own = scale_uncertainty(scale) if scale else UNSURE_SCALE_G
        return net_uncertainty(own, self.tare.error_g if self.tare else 0)


@dataclass(frozen=True, slots=True)
class Walls:
    """Heat capacities that a bottle's wall may have, likeliest first; how its mass was guessed."""

    heat_j_k: tuple[float, ...]
    assumed: str


def known_contents(bottle: Bottle) -> Known:
    """Return what is known of a bottle's contents: unknown where it was never weighed nor filled."""
    history = history_of(bottle)
    tare = _tare_of(bottle)
    weighed = history.ruling[-1] if history.ruling else None
    if weighed is None and not history.changes:
        return Known(None, 0, False, tare)
    moved = any(weighed is None or change.key > weighed.key for change in history.changes if not change.reversal)
    if weighed is not None and not moved:
        return Known(weighed.net_g, weighed.error_g, True, tare)
    balance = Account.objects.filter(bottle=bottle).values_list("balance_g", flat=True).first() or 0
    now = Spoken((clock.now(), 2**62), -1, balance, 0, False)
    return Known(balance, history.books_error(now), False, tare)


def walls_of(bottle: Bottle) -> Walls:
    """Return the wall's heat capacity; both materials where it isn't known which."""
    return walls_by(bottle, _tare_of(bottle))


def walls_by(bottle: Bottle, tare: Tare | None) -> Walls:
    """Return the wall's heat capacity by a tare that was read already."""
    made_of = wall_of(bottle)
    materials = (made_of,) if made_of in WALL_G_A_LITRE else tuple(WALL_G_A_LITRE)
    if tare is None:
        litres = (bottle.capacity_ml or 0) / 1000
        return Walls(
            tuple(wall_heat(name, WALL_G_A_LITRE[name] * litres / 1000) for name in materials),
            "taken from its capacity, as there's no tare",
        )
    parts = list(tare.parts.all())
    split = len({part.thing for part in parts}) > 1
    own = sum(part.grams for part in parts if part.thing == "bottle")
    if split and own:
        return Walls(tuple(wall_heat(name, own / 1000) for name in materials), "")
    mass = tare.total_g - min(FITTINGS_G, tare.total_g // FITTINGS_SHARE)
    return Walls(tuple(wall_heat(name, mass / 1000) for name in materials), "its tare less an allowance for valve and fittings")


def wall_of(bottle: Bottle) -> str | None:
    """What a bottle is made of: as entered, else as its mark says; None where neither tells."""
    if bottle.wall != "unknown":
        return bottle.wall
    specification = read_mark(bottle.mark).specification if bottle.mark else None
    return specification.wall if specification else None


def _tare_of(bottle: Bottle) -> Tare | None:
    return Tare.objects.filter(bottle=bottle).order_by("-since", "-id").prefetch_related("parts").first()


def takes_liquid(bottle: Bottle, *, inverted: bool) -> bool | None:
    """Return whether a supply bottle gives liquid as it stands; None where its tube isn't known."""
    phase = phase_leaving(bottle.dip_tube, INVERTED if inverted else UPRIGHT)
    return None if phase is None else phase == LIQUID


def below_tube_m3(bottle: Bottle, *, inverted: bool) -> float:
    """Return the liquid that a supply bottle's dip tube doesn't reach as it stands [m3]; nothing where it isn't known."""
    return (bottle.below_tube_ml or 0) / 1e6 if bottle.dip_tube == "dip" and not inverted else 0.0


def air_pressure(shop: Shop) -> float:
    """Return the pressure of the air in the shop [Pa]."""
    return ambient_pressure(float(shop.height_m))
