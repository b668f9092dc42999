"""What the shop sets for itself, never looser than the country's rules.

The month rule is a setting because the rule's own text leaves it open whether a bottle
may still be filled all through the month in which its test falls due.
"""

from __future__ import annotations

from dataclasses import dataclass

from bottles.rules.edition import Cited, MonthRule


@dataclass(frozen=True, slots=True)
class Overlay:
    """A stricter row that the manager made: a shorter interval for some specifications.

    ``specifications`` None means every one. A longer interval than the country's has no
    effect: an overlay only tightens.
    """

    interval_months: int
    specifications: tuple[str, ...] | None = None
    authority: str = ""

    @property
    def source(self) -> Cited:
        """The overlay as a citation: entered, under the authority's name."""
        return Cited(self.authority or "Stricter rule of this shop", "entered")


@dataclass(frozen=True, slots=True)
class Policy:
    """The shop's settings on a day. None means that the shop has no such rule."""

    month_rule: MonthRule | None = None
    visual_interval_months: int | None = None
    disc_interval_months: int | None = None
    own_limit_per_mille: int | None = None
    overlays: tuple[Overlay, ...] = ()

    def overlay_for(self, spec: str | None) -> Overlay | None:
        """The strictest overlay for a specification."""
        for_it = [
            overlay for overlay in self.overlays if overlay.specifications is None or spec in overlay.specifications
        ]
        return min(for_it, key=lambda overlay: overlay.interval_months, default=None)
