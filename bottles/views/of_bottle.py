"""The base of every page that saves something about one bottle."""

from __future__ import annotations

from typing import Any

from django.http import Http404
from django.utils.functional import cached_property

from bottles.models import Bottle, Standing
from bottles.services.standing import restate
from shop.base.fields import MassField
from shop.base.permissions import EVERYONE
from shop.people.acting import ActView


def bottle_or_404(code: str) -> Bottle:
    """Return the bottle of a code, whatever the case it was typed in."""
    bottle = Bottle.objects.filter(code__iexact=code.strip()).first()
    if bottle is None:
        raise Http404(f"There is no bottle {code} in the register.")
    return bottle


class BottleActView(ActView):
    """Finds the bottle of the address; goes back to its page after saving."""

    roles = EVERYONE
    room = "counter"
    bottle: Bottle

    def find(self, **kwargs: Any) -> None:
        self.bottle = bottle_or_404(kwargs["code"])

    @cached_property
    def standing(self) -> Standing:
        """The bottle's standing as the page was asked for, worked out where it's missing."""
        named = ("ownership", "custody__place", "tare", "weighing__scale")
        found = Standing.objects.filter(bottle=self.bottle).select_related(*named).first()
        return found or restate(self.bottle)

    @property
    def bare_mass(self) -> str:
        """The unit in which whoever signed in means a bare weight."""
        return MassField.defaults[self.request.user.units or self.shop.units]  # type: ignore[union-attr]

    def first_page(self, act: Any) -> str:
        return self.bottle.get_absolute_url()

    def context(self) -> dict[str, Any]:
        return {"bottle": self.bottle, "back": self.bottle.get_absolute_url()}
