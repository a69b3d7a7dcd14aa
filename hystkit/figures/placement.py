"""Labels in a row (or a column) that touch neither each other nor a line that crosses the row."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations_with_replacement

Span = tuple[float, float]


@dataclass(frozen=True)
class Want:
    """Where a label would like to stand.

    Attributes
    ----------
    start : float
        Wanted near edge [px].
    length : float
        Extent along the row [px].
    """

    start: float
    length: float

    @classmethod
    def centred(cls, at: float, length: float) -> Want:
        """Want the middle of the label at `at`."""
        return cls(at - length / 2, length)


def free_spans(row: Span, walls: Sequence[float], clearance: float = 0.0) -> tuple[Span, ...]:
    """Return the pieces of a row between the walls that cross it.

    Parameters
    ----------
    row : tuple of float
        Both ends of the row [px].
    walls : sequence of float
        Lines across the row [px], in any order; those outside do not matter.
    clearance : float, default 0
        Space kept on either side of a wall [px].

    Returns
    -------
    tuple of (start, end)
        In ascending order, none empty.
    """
    spans = []
    start = row[0]
    for wall in sorted(walls):
        end = min(wall - clearance, row[1])
        if end > start:
            spans.append((start, end))
        start = max(start, wall + clearance)
    if row[1] > start:
        spans.append((start, row[1]))
    return tuple(spans)


def place(
    wants: Sequence[Want],
    row: Span,
    *,
    walls: Sequence[float] = (),
    gap: float = 0.0,
    clearance: float = 0.0,
) -> tuple[float, ...] | None:
    """Place labels in their order, each as near as possible to where it wants to stand.

    Among all ways to share the labels out over the pieces between the walls, the one with the
    least sum of squared displacements is taken.

    Parameters
    ----------
    wants : sequence of Want
        In the order in which they shall stand.
    row : tuple of float
        Both ends of the row [px].
    walls : sequence of float, optional
        Lines that no label may cross [px].
    gap : float, default 0
        Least space between two labels in one piece [px].
    clearance : float, default 0
        Least space between a label and a wall; labels across a wall are twice that apart [px].

    Returns
    -------
    tuple of float, or None
        Start of each label [px]; None if they do not fit.

    Examples
    --------
    Two labels that want the same place, beside a wall:

    >>> place([Want(40, 20), Want(40, 20)], (0, 100), walls=[70], gap=2)
    (28.0, 50.0)
    """
    if not wants:
        return ()
    spans = free_spans(row, walls, clearance)
    best: tuple[float, tuple[float, ...]] | None = None
    for choice in combinations_with_replacement(range(len(spans)), len(wants)):
        starts = _fill(wants, choice, spans, gap)
        if starts is None:
            continue
        cost = sum((s - want.start) ** 2 for s, want in zip(starts, wants, strict=True))
        if best is None or cost < best[0] - 1e-9:
            best = (cost, starts)
    return None if best is None else best[1]


def spread_out(wants: Sequence[Want], row: Span, gap: float = 0.0) -> tuple[float, ...] | None:
    """Place labels in a row that nothing crosses; as `place`.

    Parameters
    ----------
    wants : sequence of Want
        In the order in which they shall stand.
    row : tuple of float
        Both ends of the row [px].
    gap : float, default 0
        Least space between two labels [px].

    Returns
    -------
    tuple of float, or None
        Start of each label [px]; None if they do not fit.
    """
    offsets = [0.0]
    for want in wants[:-1]:
        offsets.append(offsets[-1] + want.length + gap)
    slack = row[1] - row[0] - offsets[-1] - (wants[-1].length if wants else 0.0)
    if slack < 0:
        return None
    # Less its offset, a label needs only to stand no further left than the one before it.
    free = [want.start - offset for want, offset in zip(wants, offsets, strict=False)]
    return tuple(
        min(max(start, row[0]), row[0] + slack) + offset
        for start, offset in zip(_ascending(free), offsets, strict=False)
    )


def thinned(
    spans: Sequence[Span], order: Sequence[int], *, taken: Sequence[Span] = (), gap: float = 0.0
) -> tuple[int, ...]:
    """Return which of many labels to keep, where each stands at its own place or not at all.

    Parameters
    ----------
    spans : sequence of (start, end)
        Extent of each label [px].
    order : sequence of int
        Indices, the most wanted first.
    taken : sequence of (start, end), optional
        Extents that are not free.
    gap : float, default 0
        Least space between two labels [px].

    Returns
    -------
    tuple of int
        Indices that are kept, ascending.
    """
    used = list(taken)
    kept = []
    for index in order:
        start, end = spans[index]
        if all(end + gap <= low or high + gap <= start for low, high in used):
            used.append((start, end))
            kept.append(index)
    return tuple(sorted(kept))


def _fill(
    wants: Sequence[Want], choice: Sequence[int], spans: Sequence[Span], gap: float
) -> tuple[float, ...] | None:
    """Place every label inside the span that `choice` gives it."""
    starts: list[float] = []
    for index in sorted(set(choice)):
        group = [want for want, chosen in zip(wants, choice, strict=True) if chosen == index]
        placed = spread_out(group, spans[index], gap)
        if placed is None:
            return None
        starts.extend(placed)
    return tuple(starts)


def _ascending(values: Sequence[float]) -> Iterator[float]:
    """Yield the ascending sequence nearest to `values` (pool adjacent violators)."""
    pools: list[tuple[float, int]] = []
    for value in values:
        total, count = value, 1
        while pools and pools[-1][0] / pools[-1][1] > total / count:
            earlier = pools.pop()
            total, count = total + earlier[0], count + earlier[1]
        pools.append((total, count))
    for total, count in pools:
        for _ in range(count):
            yield total / count
