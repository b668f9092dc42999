"""Change whose a bottle is."""

from __future__ import annotations

import uuid
from typing import Any

from bottles.forms.owners import OwnerForm, owner_typed
from bottles.selectors.register import owner_words, owners_of
from bottles.services.owners import change_owner
from bottles.views.of_bottle import BottleActView
from shop.base import clock
from shop.base.permissions import DESK
from shop.people.models import User


class NewOwner(BottleActView):
    """Whose it is from a day on."""

    roles = DESK
    form_class = OwnerForm
    template_name = "bottles/owner.html"

    def initial(self) -> dict[str, Any]:
        return owner_typed(owners_of(self.bottle).first()) | {"since": clock.today(self.shop)}

    def context(self) -> dict[str, Any]:
        rows = [[owner_words(owner), f"{owner.since:%Y-%m-%d}"] for owner in owners_of(self.bottle)]
        return super().context() | {"heading": f"Owner of {self.bottle.code}", "owners": rows}

    def act(self, form: OwnerForm, person: User, key: uuid.UUID) -> str:
        change_owner(
            key=key, person=person, bottle=self.bottle, owner=form.new_owner(), since=form.cleaned_data["since"]
        )
        return self.bottle.get_absolute_url()
