"""The part of the ruler that stays: both graduated edges, rails, bars and the names of rows."""

from __future__ import annotations

from matplotlib.axes import Axes

from hystkit.figures.drafting import BACK, SCALE, Ink, Point, box, lettered, segments, stretch
from hystkit.figures.lettering import wrapped, written_span
from hystkit.figures.placement import Span, Want, place
from hystkit.figures.ruler_plan import EDGE, NO_TRIPS, Plan, Rows, Ticks
from hystkit.figures.theme import Theme

_LINE_HEIGHT = 15.0


def draw_scale(page: Axes, plan: Plan, rows: Rows, theme: Theme, width_px: int) -> None:
    """Draw everything of a ruler that stays while the trips move.

    Parameters
    ----------
    page : Axes
        Empty page.
    plan : Plan
        What to draw.
    rows : Rows
        Heights.
    theme : Theme
        Colours.
    width_px : int
        Width of the page.
    """
    _draw_rails(page, plan, rows, theme, width_px)
    _draw_volts(page, plan, rows, theme)
    _draw_measurand(page, plan, rows, theme)
    if plan.common_mode is not None:
        _draw_common_mode(page, plan, rows, theme)
    if plan.levels_row:
        _name_row(page, "levels", rows.level_markers + 4, theme)
    if plan.message:
        _draw_message(page, plan.message, rows, theme, width_px)


def _name_row(page: Axes, name: str, baseline: float, theme: Theme) -> None:
    lettered(page, name, (EDGE, baseline), Ink(theme.muted, "small"))


def _draw_rails(page: Axes, plan: Plan, rows: Rows, theme: Theme, width_px: int) -> None:
    names = [(plan.scale.px(value), Ink(theme.text, math="$" in name), name)
             for value, name in plan.rails]  # fmt: skip
    lengths = [ink.width(name) for _, ink, name in names]
    wants = [Want.centred(x, length) for (x, _, _), length in zip(names, lengths, strict=True)]
    starts = place(wants, (EDGE, width_px - EDGE), gap=8) or ()
    for start, (_, ink, name) in zip(starts, names, strict=False):
        lettered(page, name, (start, rows.rail_names), ink)
    pieces = [
        ((x, top), (x, bottom)) for x, _, _ in names for top, bottom in _rail_pieces(x, plan, rows)
    ]
    segments(page, pieces, theme.line, 2, gid="rail")


def _rail_pieces(x: float, plan: Plan, rows: Rows) -> list[Span]:
    """Return the rail in pieces: it stops where it would run through a text."""
    gaps = [(rows.axis + 7, rows.below)]
    if plan.measurand is not None and any(abs(at - x) < 26 for at, _ in plan.measurand.numbers):
        gaps.insert(0, (rows.measurand_numbers - 12, rows.measurand_numbers + 4))
    if plan.message:
        gaps.insert(-1, (rows.trip_names - 14, rows.trip_names + 2 * _LINE_HEIGHT))
    tops = [rows.rail_top, *(end for _, end in gaps)]
    bottoms = [*(start for start, _ in gaps), rows.rail_bottom]
    return [pair for pair in zip(tops, bottoms, strict=True) if pair[1] > pair[0]]


def _draw_ticks(page: Axes, at: Ticks, edge: float, sign: int, colour: str) -> None:
    """Draw ticks from an edge, down the page with sign 1 and up with -1."""
    segments(page, [_upright(x, edge, edge + sign * 4) for x in at.minor], colour, 1)
    segments(page, [_upright(x, edge, edge + sign * 7) for x in at.major], colour, 1.4)


def _upright(x: float, top: float, bottom: float) -> tuple[Point, Point]:
    return (x, top), (x, bottom)


def _draw_volts(page: Axes, plan: Plan, rows: Rows, theme: Theme) -> None:
    ends = ((plan.scale.start, rows.axis), (plan.scale.end, rows.axis))
    segments(page, [ends], theme.line, 2, gid="axis")
    _draw_ticks(page, plan.volts, rows.axis, 1, theme.line)
    for x, text in plan.volts.numbers:
        lettered(page, text, (x, rows.volt_numbers), Ink(theme.text, "small"), "center")
    _name_row(page, f"voltage / {plan.volt_unit}", rows.volt_numbers, theme)


def _draw_measurand(page: Axes, plan: Plan, rows: Rows, theme: Theme) -> None:
    """Draw the span of the signal as a bar, and on it the scale of the measurand."""
    if plan.signal_span is not None:
        left, right = (plan.scale.inside(end) for end in plan.signal_span)
        stretch(
            box(page, theme.signal, 1.0, BACK), left, rows.span_bar - 2, right, rows.span_bar + 2
        )
    if plan.measurand is None and plan.signal_span is None:
        return
    if plan.measurand is not None:
        _draw_ticks(page, plan.measurand, rows.span_bar - 2, -1, theme.signal)
        for x, text in plan.measurand.numbers:
            ink = Ink(theme.text, "small")
            lettered(page, text, (x, rows.measurand_numbers), ink, "center")
    text = plan.measurand_span or (written_span(*plan.signal_span) if plan.signal_span else "")
    baseline = rows.span_bar + 4
    lettered(page, text, (plan.scale.end + 12, baseline), Ink(theme.text, "small"))
    _name_row(page, plan.measurand_name, baseline, theme)


def _draw_common_mode(page: Axes, plan: Plan, rows: Rows, theme: Theme) -> None:
    assert plan.common_mode is not None
    scale, y = plan.scale, rows.common_mode
    left, right = (scale.inside(end) for end in plan.common_mode)
    stretch(box(page, theme.common_mode, 0.35, BACK), left, y - 5, right, y + 5)
    edges = [((left, side), (right, side)) for side in (y - 5, y + 5)]
    segments(page, edges, theme.common_mode, 1, zorder=BACK)
    # An end that lies beyond the axis is left open.
    ends = [end for end in plan.common_mode if scale.low <= end <= scale.high]
    caps = [_upright(scale.px(end), y - 6, y + 6) for end in ends]
    segments(page, caps, theme.common_mode, 2, zorder=SCALE)
    text = written_span(*plan.common_mode)
    lettered(page, text, (scale.end + 12, y + 4), Ink(theme.text, "small"))
    _name_row(page, "common mode", y + 4, theme)
    if not plan.message:
        _name_row(page, "margin", rows.margin + 4, theme)


def _draw_message(page: Axes, message: str, rows: Rows, theme: Theme, width_px: int) -> None:
    lines = wrapped(f"! {message}", width_px - 4 * EDGE, 2) or (NO_TRIPS,)
    for number, text in enumerate(lines):
        at = (width_px / 2, rows.trip_names + number * _LINE_HEIGHT)
        lettered(page, text, at, Ink(theme.warning), "center")
