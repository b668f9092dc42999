"""Scale and books, and a refill split into its lines."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.books import compare, difference_plus_minus, split_refill


@pytest.mark.parametrize(
    ("books", "net", "out", "owner", "reason", "finding", "source", "target", "grams"),
    [
        # ± 30 and 40 g: the difference is good to √(900 + 1600) = 50 g.
        (4000, 4000, False, "shop", "", "agrees", None, None, 0),
        (4000, 3950, False, "shop", "", "agrees", None, None, 0),
        (4000, 4050, True, "customer", "", "agrees", None, None, 0),
        (4000, 3949, True, "customer", "", "adjusts", "bottle", "customer", 51),
        (4000, 0, True, "customer", "", "adjusts", "bottle", "customer", 4000),
        (4000, 3949, False, "customer", "", "needs a reason", "bottle", "unaccounted", 51),
        (4000, 3949, False, "customer", "slow leak", "adjusts", "bottle", "unaccounted", 51),
        (4000, 3000, True, "shop", "", "needs a reason", "bottle", "unaccounted", 1000),
        (4000, 3000, True, "shop", "lent out", "adjusts", "bottle", "unaccounted", 1000),
        (4000, 3000, False, "shop", "  ", "needs a reason", "bottle", "unaccounted", 1000),
        (4000, 4051, True, "customer", "", "filled elsewhere", "customer", "bottle", 51),
        (4000, 4051, True, "customer", "he says so", "filled elsewhere", "customer", "bottle", 51),
        (4000, 4051, True, "shop", "", "filled elsewhere", "unaccounted", "bottle", 51),
        (4000, 4051, False, "shop", "", "needs a reason", "unaccounted", "bottle", 51),
        (4000, 4051, False, "shop", "found", "adjusts", "unaccounted", "bottle", 51),
        (4000, 9000, True, "supplier", "", "needs a reason", "unaccounted", "bottle", 5000),
        (None, 1200, False, "customer", "", "opens", "customer", "bottle", 1200),
        (None, 1200, False, "supplier", "", "opens", "supplier", "bottle", 1200),
        (None, 1200, False, "shop", "", "opens", "supplier", "bottle", 1200),
        (None, 0, False, "shop", "", "opens", None, None, 0),
        (None, -12, False, "shop", "", "opens", None, None, 0),
        (40, -12, False, "shop", "", "agrees", None, None, 0),
        (100, -12, True, "customer", "", "adjusts", "bottle", "customer", 100),
    ],
)
def test_what_a_weighing_means(books, net, out, owner, reason, finding, source, target, grams) -> None:
    found = compare(books_g=books, net_g=net, e_net_g=30, e_books_g=40, was_out=out, owner=owner, reason=reason)
    assert (found.finding, found.source, found.target, found.grams) == (finding, source, target, grams)
    assert found.contents_unknown == (finding == "filled elsewhere")
    assert found.tolerance_g == 50


@given(
    st.integers(0, 50_000),
    st.integers(-500, 50_000),
    st.integers(0, 300),
    st.integers(0, 300),
    st.booleans(),
    st.sampled_from(["shop", "customer", "supplier", None]),
)
def test_posting_brings_the_books_to_the_scale_and_never_below_nothing(books, net, e1, e2, out, owner) -> None:
    found = compare(books_g=books, net_g=net, e_net_g=e1, e_books_g=e2, was_out=out, owner=owner, reason="x")
    after = books
    if found.source == "bottle":
        after -= found.grams
    elif found.target == "bottle":
        after += found.grams
    assert after == (books if found.finding == "agrees" else max(0, net))
    assert after >= 0
    assert (found.grams > 0) == (found.source is not None)


def test_a_slow_leak_adds_up_until_it_stands_out() -> None:
    # 20 g a week against ± 50 g: nothing posted for two weeks, the whole 60 g in the third.
    books, found = 4000, []
    for week in (1, 2, 3):
        answer = compare(
            books_g=books, net_g=4000 - 20 * week, e_net_g=30, e_books_g=40, was_out=False, owner="shop", reason="leak"
        )
        found.append(answer.grams)
        books -= answer.grams
    assert found == [0, 0, 60]


@given(st.integers(0, 10**6), st.integers(0, 10**6))
def test_plus_minus_of_a_difference_is_rounded_up(first: int, second: int) -> None:
    found = difference_plus_minus(first, second)
    assert found >= max(first, second)
    assert (found - 1) ** 2 < first**2 + second**2 <= found**2 or found == 0
    assert found == math.ceil(math.hypot(first, second)) or abs(found - math.hypot(first, second)) < 1e-6 * found + 1


@given(st.none() | st.integers(-100, 20_000), st.integers(0, 20_000), st.integers(0, 200))
def test_a_split_refill_adds_up_on_both_sides(loss: int | None, gain: int, line: int) -> None:
    split = split_refill(source_loss_g=loss, receiver_gain_g=gain, line_loss_g=line)
    assert min(split.to_receiver, split.to_line, split.found) >= 0
    assert split.to_receiver + split.found == gain
    if loss is None:
        assert (split.to_line, split.found) == (line, 0)
    else:
        assert split.to_receiver + split.to_line == max(0, loss)
        assert split.to_line == 0 or split.found == 0


def test_a_refill_that_takes_away_is_refused() -> None:
    with pytest.raises(ValueError, match="can't take"):
        split_refill(source_loss_g=100, receiver_gain_g=-1)
