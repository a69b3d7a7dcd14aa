"""What a slider move costs in the kernel, against drawing the same things afresh."""

from __future__ import annotations

import io
from typing import Any

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.circuit.preferred import step
from tests.benchmarks.measure import Comparison, alternating

SCALE = 2
SAMPLES = 20_000


def saved(picture: Any) -> bytes:
    """The picture as matplotlib writes it by itself: everything drawn, its own PNG writer."""
    for artist in picture.figure.findobj():
        artist.set_animated(False)
    file = io.BytesIO()
    picture.figure.savefig(file, format="png", dpi=SCALE * picture.figure.dpi)
    return file.getvalue()


def comparisons() -> list[Comparison]:
    start = header_tank()
    panel = hk.panels.TripPanel(start)
    views = (panel.ruler, panel.figure, panel.schematic)

    # Each goes through values of its own, so that none finds what another has drawn.
    def changed(steps: int) -> hk.Design:
        return start.with_parts(R_F=step(start.parts["R_F"].value, "E96", steps))

    def move(turn: int) -> None:
        panel.design = changed(3 * turn)

    def pictures(design: hk.Design) -> list[Any]:
        shown = hk.loop(design)
        made = [type(view.picture)("any", view.picture.width_px) for view in views]
        for picture, data in zip(made, (shown.levels, shown, design), strict=True):
            picture.update(data)
        return made

    def save_afresh(turn: int) -> None:
        for picture in pictures(changed(3 * turn + 1)):
            saved(picture)

    def encode_afresh(turn: int) -> None:
        for picture in pictures(changed(3 * turn + 2)):
            picture.png(SCALE)

    moved, by_savefig, by_png = alternating(move, save_afresh, encode_afresh)
    assert not panel.error, panel.error
    panel.close()
    subject = "slider move in TripPanel, all of it"
    return [
        Comparison(subject, moved, "its pictures afresh, by savefig", by_savefig, at_least=4.0),
        Comparison(subject, moved, "its pictures afresh, own PNG writer", by_png),
        spread_panel("slider move in SpreadPanel, 20,000 samples", header_tank()),
        spread_panel("... with the tolerances of a thermistor", vent()),
    ]


def vent() -> hk.Design:
    """A greenhouse vent, whose thermistor has tolerances and shares the supply."""
    sensor = hk.signals.Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005)
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k", "R_PU": "4k7"}
    return hk.Design(
        hk.Stage("inverting", output="open-collector"),
        {name: hk.Part(value, tol="1 %") for name, value in parts.items()},
        supply=hk.Supply(5.0, tol="5 %"),
        device=hk.Device(drop_low=0.2, limits={"drop_low": (0.1, 0.4), "offset": (-5e-3, 5e-3)}),
        signal=hk.signals.SensorDivider(sensor, hk.Part("10k", tol="1 %"), span=(-10, 45)),
    )


def spread_panel(subject: str, start: hk.Design) -> Comparison:
    """A slider move in SpreadPanel, against its samples and shares drawn the plain way."""
    trips = hk.trip_points(start)
    windows = {
        t: (getattr(trips, t) - 0.035, getattr(trips, t) + 0.035) for t in ("upper", "lower")
    }
    panel = hk.panels.SpreadPanel(start, **windows)
    assert panel.request.samples == SAMPLES
    width_px = panel.figure.picture.width_px

    def changed(steps: int) -> hk.Design:
        return start.with_parts(R_F=step(start.parts["R_F"].value, "E96", steps))

    def move(turn: int) -> None:
        panel.design = changed(2 * turn)

    def plain(turn: int) -> None:
        drawn_plainly(hk.spread(changed(2 * turn + 1), samples=SAMPLES), width_px)

    moved, by_hist = alternating(move, plain)
    assert not panel.error, panel.error
    panel.close()
    return Comparison(subject, moved, "samples and shares by hist and barh", by_hist, limit=0.100)


def drawn_plainly(found: hk.Spread, width_px: int) -> bytes:
    """Histograms, limits and shares in a new figure, without ruler, schematic, law and table."""
    figure = Figure(figsize=(width_px / 100, 5), dpi=100)
    FigureCanvasAgg(figure)
    above, below = figure.subplots(2)
    for trip in ("upper", "lower"):
        above.hist(found.samples[trip], bins=100, alpha=0.4, label=trip)
        above.axvspan(*found.extremes[trip], alpha=0.1)
    above.set_xlabel("signal / V")
    above.legend()
    for place, kind in enumerate(("upper", "lower", "width")):
        shares = found.contributions[kind]
        rows = [row + place / 4 for row in range(len(shares))]
        below.barh(rows, list(shares.values()), height=0.25)
    file = io.BytesIO()
    figure.savefig(file, format="png", dpi=SCALE * 100)
    return file.getvalue()
