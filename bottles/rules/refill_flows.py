"""Where the nitrous of a refill came from and went, worked out anew from all its weighings.

The books follow the weighings: whatever was posted before, what is posted next is the difference
between this answer and that. A weighing that is struck, or entered late, therefore puts itself
right at the next one.

- Between two weighings of the bottle being filled what came in *arrived* from the supply bottle
  then in force; what is missing beyond the ± was *vented*.
- Where the supply bottle is weighed, what it lost and what didn't arrive stayed in the line, up
  to the line's own loss and the ± of the weighings; beyond that it's *missing*. What arrived and
  wasn't lost by its scale is *found*: the scales' residual within the ±, else unaccounted.
- Where it isn't, its books go down by what arrived and, once the line is off, the line's loss.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from bottles.rules.books import difference_plus_minus, split_refill

FlowKind = Literal["arrived", "line", "missing", "found", "found beyond", "vented"]


@dataclass(frozen=True, slots=True)
class Read:
    """One weighing of the bottle being filled; ``draw`` numbers the supply bottle in force."""

    net_g: int
    error_g: int
    draw: int
    line_off: bool


@dataclass(frozen=True, slots=True)
class Source:
    """What is known of one supply bottle's part: its own weighings, and its line.

    ``lost_g`` is what its scale says it lost so far, None where it isn't weighed.
    ``moved_on`` says that the line was taken over to the next supply bottle.
    """

    lost_g: int | None = None
    lost_error_g: int = 0
    line_g: int = 0
    line_error_g: int = 0
    moved_on: bool = False


@dataclass(frozen=True, slots=True)
class Flow:
    """Grams that went one way in the whole refill so far; ``draw`` None: not of one supply."""

    kind: FlowKind
    draw: int | None
    grams: int
    error_g: int
    origin: Literal["weighed", "computed"]


def flows(before: Read, reads: Sequence[Read], sources: Sequence[Source]) -> list[Flow]:
    """All flows of a refill so far, from its weighings in the order in which they happened."""
    arrived = [0] * len(sources)
    arrived_error = [0] * len(sources)
    bled = [source.moved_on for source in sources]
    vented = vented_error = 0
    last = before
    for read in reads:
        change = read.net_g - last.net_g
        error = difference_plus_minus(read.error_g, last.error_g)
        if change < -error:
            vented -= change
            vented_error = error
        else:
            arrived[read.draw] += change
            arrived_error[read.draw] = error
        bled[read.draw] = bled[read.draw] or read.line_off
        last = read
    found: list[Flow] = []
    for number, source in enumerate(sources):
        found.extend(_of_source(number, source, max(0, arrived[number]), arrived_error[number], bled[number]))
    if vented:
        found.append(Flow("vented", None, vented, vented_error, "weighed"))
    return found


def _of_source(number: int, source: Source, arrived: int, error: int, bled: bool) -> list[Flow]:
    # Where nothing arrived beyond the ±, the line may never have been opened: nothing is claimed.
    line_g = source.line_g if bled and arrived > error else 0
    split = split_refill(source_loss_g=source.lost_g, receiver_gain_g=arrived, line_loss_g=line_g)
    weighed = source.lost_g is not None
    both = difference_plus_minus(error, source.lost_error_g)
    parts: list[Flow] = [Flow("arrived", number, split.to_receiver, error, "weighed")]
    if weighed:
        most_in_line = source.line_g + source.line_error_g + both
        parts.append(Flow("line", number, min(split.to_line, most_in_line), both, "weighed"))
        parts.append(Flow("missing", number, max(0, split.to_line - most_in_line), both, "weighed"))
        residual: FlowKind = "found" if split.found <= both else "found beyond"
        parts.append(Flow(residual, number, split.found, both, "weighed"))
    else:
        parts.append(Flow("line", number, split.to_line, source.line_error_g, "computed"))
    return [part for part in parts if part.grams]
