"""Labels in rows: never on each other or on a wall, nearest to where they want to stand."""

from __future__ import annotations

from itertools import combinations, pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.figures.placement import Want, free_spans, place, spread_out, thinned

ROW = (0.0, 100.0)
WANTS = st.lists(
    st.builds(Want, st.floats(-50, 150), st.floats(0.5, 45)), min_size=1, max_size=4
).map(lambda wants: sorted(wants, key=lambda want: want.start))
WALLS = st.lists(st.floats(-10, 110), max_size=4)


def broken(
    wants: list[Want], starts: tuple[float, ...], walls: list[float], gap: float, clearance: float
) -> list[str]:
    """Return the rules that a placement breaks."""
    boxes = [(start, start + want.length) for start, want in zip(starts, wants, strict=True)]
    rules = {
        "inside": boxes[0][0] >= ROW[0] - 1e-6 and boxes[-1][1] <= ROW[1] + 1e-6,
        "apart": all(b[0] - a[1] >= min(gap, 2 * clearance) - 1e-6 for a, b in pairwise(boxes)),
        "apart without a wall between": all(
            b[0] - a[1] >= gap - 1e-6
            for a, b in pairwise(boxes)
            if not any(a[1] - 1e-6 <= wall <= b[0] + 1e-6 for wall in walls)
        ),
        "off the walls": all(
            end <= wall - clearance + 1e-6 or start >= wall + clearance - 1e-6
            for start, end in boxes
            for wall in walls
        ),
    }
    return [rule for rule, kept in rules.items() if not kept]


@given(wants=WANTS, walls=WALLS, gap=st.floats(0, 8), clearance=st.floats(0, 4))
def test_a_placement_breaks_no_rule(
    wants: list[Want], walls: list[float], gap: float, clearance: float
) -> None:
    starts = place(wants, ROW, walls=walls, gap=gap, clearance=clearance)
    if starts is not None:
        assert broken(wants, starts, walls, gap, clearance) == []


def cheapest_on_a_grid(wants: list[Want], walls: list[int], gap: int) -> float | None:
    """Least sum of squared displacements with whole starts, by dynamic programming."""
    # Cost of having placed all labels so far, by the place where the last one ends.
    best = {-1000: 0.0}
    for want in wants:
        found: dict[int, float] = {}
        for start in range(101 - int(want.length)):
            end = start + int(want.length)
            if any(start < wall < end for wall in walls):
                continue
            legal = [
                cost
                for last, cost in best.items()
                if start >= last + (0 if any(last <= w <= start for w in walls) else gap)
            ]
            if legal:
                found[end] = min(legal) + (start - want.start) ** 2
        best = found
    return min(best.values(), default=None)


WHOLE_WANTS = st.lists(
    st.builds(Want, st.integers(-20, 120), st.integers(1, 45)), min_size=1, max_size=4
).map(lambda wants: sorted(wants, key=lambda want: want.start))


@given(
    wants=WHOLE_WANTS,
    walls=st.lists(st.integers(-10, 110), max_size=3),
    gap=st.integers(0, 8),
)
def test_no_placement_on_a_grid_is_better(wants: list[Want], walls: list[float], gap: int) -> None:
    starts = place(wants, ROW, walls=walls, gap=gap)
    least = cheapest_on_a_grid(wants, walls, gap)
    if least is None:
        # The grid misses nothing here: all lengths and walls are whole.
        assert starts is None
        return
    assert starts is not None
    cost = sum((start - want.start) ** 2 for start, want in zip(starts, wants, strict=True))
    assert cost <= least + 1e-6


def test_a_label_that_fits_stays() -> None:
    assert place([Want(10, 20), Want(50, 20)], ROW, walls=[40], gap=5) == (10, 50)


def test_without_labels_there_is_nothing_to_place() -> None:
    assert place([], ROW) == ()
    assert spread_out([], ROW) == ()


def test_what_does_not_fit_is_not_placed() -> None:
    assert place([Want(0, 60), Want(0, 60)], ROW) is None
    assert place([Want(0, 60)], ROW, walls=[50]) is None


def test_crowded_labels_share_the_displacement() -> None:
    assert spread_out([Want(40, 20), Want(40, 20)], ROW) == (30, 50)


@given(walls=WALLS, clearance=st.floats(0, 4))
def test_free_spans_are_what_the_walls_leave(walls: list[float], clearance: float) -> None:
    spans = free_spans(ROW, walls, clearance)
    assert all(start < end for start, end in spans)
    for x in np.linspace(0.05, 99.95, 200):
        if any(abs(abs(x - wall) - clearance) < 1e-6 for wall in walls):
            continue
        free = all(abs(x - wall) > clearance for wall in walls)
        assert any(start < x < end for start, end in spans) is free


@given(
    st.lists(st.tuples(st.floats(0, 100), st.floats(1, 20)), max_size=8),
    st.randoms(use_true_random=False),
)
def test_thinned_labels_are_apart_and_none_is_dropped_needlessly(
    parts: list[tuple[float, float]], random: object
) -> None:
    spans = [(start, start + length) for start, length in parts]
    order = list(range(len(spans)))
    random.shuffle(order)  # type: ignore[attr-defined]
    kept = thinned(spans, order, gap=2)

    def touch(a: int, b: int) -> bool:
        return not (spans[a][1] + 2 <= spans[b][0] or spans[b][1] + 2 <= spans[a][0])

    assert not any(touch(a, b) for a, b in combinations(kept, 2))
    for index in set(order) - set(kept):
        earlier = order[: order.index(index)]
        assert any(touch(index, other) for other in earlier if other in kept)


def test_taken_places_are_kept_free() -> None:
    assert thinned([(0, 10), (20, 30)], [0, 1], taken=[(5, 6)]) == (1,)


@pytest.mark.parametrize("walls", [[70], [70, 70], [70, 200]])
def test_labels_keep_their_order_across_a_wall(walls: list[float]) -> None:
    starts = place([Want(60, 20), Want(61, 20)], ROW, walls=walls)
    assert starts == (50, 70)
