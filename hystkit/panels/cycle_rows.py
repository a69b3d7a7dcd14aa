"""Rows of a plant's numbers: a slider and a typed value each."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial
from typing import Any

import ipywidgets as widgets

from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.panels.asking import LABEL_AND_FIELD, Chosen
from hystkit.panels.cycle_request import NUMBERS, OWN, CycleRequest
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.entries import VALUE_WIDTH, Note, row_of, text_field
from hystkit.panels.parts import Steps
from hystkit.panels.texts import amount

#: Steps of a level to either side of where it begins.
_LEVEL_STEPS = 60
_SERIES = "E24"
#: Dead time about which a slider steps that begins at none [s].
_FIRST_DEAD_TIME = 30.0
_PAIR = " / "

Times = float | tuple[float, float]


@dataclass(frozen=True)
class Ladder:
    """The values that a slider steps through, ascending."""

    values: tuple[float, ...]

    @classmethod
    def of_times(cls, middle: float) -> Ladder:
        """Preferred numbers, a decade to either side of a time > 0."""
        return cls(Steps(_SERIES, middle).values)

    @classmethod
    def of_dead_times(cls, middle: float) -> Ladder:
        """None, and preferred numbers about a dead time."""
        return cls((0.0, *Steps(_SERIES, middle or _FIRST_DEAD_TIME).values))

    @classmethod
    def of_rates(cls, middle: float) -> Ladder:
        """Preferred numbers of the sign that a rate has."""
        if not middle:
            return cls((0.0,))
        values = Steps(_SERIES, abs(middle)).values
        return cls(values if middle > 0 else tuple(-value for value in reversed(values)))

    @classmethod
    def of_levels(cls, middle: float, step: float) -> Ladder:
        """Multiples of a step about a level."""
        first = round(middle / step) - _LEVEL_STEPS
        return cls(tuple(float(f"{(first + n) * step:.9g}") for n in range(2 * _LEVEL_STEPS + 1)))

    def place(self, value: float) -> int:
        """Give the number of the nearest step.

        Parameters
        ----------
        value : float
            Any number.
        """
        above = bisect_left(self.values, value)
        pair = [n for n in (above - 1, above) if 0 <= n < len(self.values)]
        return min(pair, key=lambda n: abs(value - self.values[n]))

    def reach(self, value: float) -> bool:
        """Whether a value lies between the first and the last step.

        Parameters
        ----------
        value : float
            Any number.
        """
        return self.values[0] <= value <= self.values[-1]


class NumberRow:
    """One number of the plant.

    The slider holds the number of a step, never the value: a front end may round what a slider
    holds, and a value beside the steps would be lost.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    name : str
        Field of the request.
    label : str
        What stands before it.
    says : str
        Accessible name of the field.
    ladder : callable
        Gives the steps about a value.
    read : callable
        Gives the value for a typed text.
    write : callable
        Gives the text for a value.
    """

    def __init__(
        self,
        desk: Desk,
        name: str,
        label: str,
        says: str,
        ladder: Callable[[float], Ladder],
        read: Callable[[str], Any],
        write: Callable[[Any], str],
    ) -> None:
        self.name = name
        self._ladder_about, self._read, self._write = ladder, read, write
        self._ladder = Ladder((0.0,))
        self._begins_anew = True
        self.note = Note(desk)
        self.slider = desk.kit.make(
            widgets.IntSlider,
            "slider",
            description=label,
            tooltip=f"{says}, in steps",
            readout=False,
            min=0,
            max=1,
            layout={"width": "auto", "min_width": "0", "margin": "0"},
            style={"description_width": LABEL_AND_FIELD.split()[0]},
        )
        self.field = text_field(desk, says, "100%")
        desk.listen(self.slider, self._stepped, self.note.say)
        desk.listen(self.field, self._typed, self.note.say, keep=True)
        self.widget = row_of(desk, f"1fr {VALUE_WIDTH}", [self.slider, self.field], self.note)

    def show(self, value: Any) -> None:
        """Show a value.

        Parameters
        ----------
        value : float or pair of float
            As the request has it; a pair is typed only.
        """
        self.note.clear()
        self.field.value = self._write(value)
        single = not isinstance(value, tuple)
        self.slider.disabled = not single
        if not single:
            return
        # The steps stay while the value is among them: a slider must not move under the hand.
        if self._begins_anew or not self._ladder.reach(value):
            self._ladder = self._ladder_about(value)
            self._begins_anew = False
        with self.slider.hold_sync():
            place, last = self._ladder.place(value), len(self._ladder.values) - 1
            self.slider.value = min(place, self.slider.max)
            self.slider.max = last
            self.slider.value = place

    def _stepped(self, place: int) -> Changes:
        return {self.name: self._ladder.values[place]}

    def _typed(self, text: str) -> Changes:
        value = self._read(text)
        self._begins_anew = True
        return {self.name: value}


class PlantSection:
    """The plant: its kind, and the numbers that this kind has.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    find : callable
        Gives the request as it stands.
    step : callable
        Gives the step of the sliders of levels [unit].
    """

    def __init__(
        self, desk: Desk, find: Callable[[], CycleRequest], step: Callable[[], float]
    ) -> None:
        self._find, self._step = find, step
        self._unit = ""
        kit = desk.kit
        kinds = {"one lag": "lag", "two lags": "two lags", "integrating": "integrating"}
        self.kind = Chosen(desk, "kind", "plant", {**kinds, "own linear plant": OWN})
        self.rows = {row.name: row for row in self._make_rows(desk)}
        self.remark: Any = kit.label("")
        self._list = kit.make(widgets.VBox, layout={"width": "100%", "margin": "0"})
        self.widget = kit.make(
            widgets.VBox,
            "section",
            children=[kit.label("Plant", "heading"), self.kind.widget, self._list],
            layout={"width": "100%", "margin": "0"},
        )

    def show(self, design: Design) -> None:
        """Show the plant.

        Parameters
        ----------
        design : Design
            Its signal gives the unit.
        """
        request = self._find()
        self._unit = "V" if design.signal is None else design.signal.unit
        self.kind.show(request.kind)
        if request.kind == OWN:
            states = 0 if request.own is None else request.own.dynamics.order
            text = f"{states} states; its numbers are set in code: panel.set(plant=...)"
            self.remark.value = f'<span class="hystkit-quiet">{text}</span>'
            self._list.children = [self.remark]
            return
        shown = [*NUMBERS[request.kind], "dead_time"]
        for name in shown:
            self.rows[name].show(getattr(request, name))
        self._list.children = [self.rows[name].widget for name in shown]

    def _make_rows(self, desk: Desk) -> Sequence[NumberRow]:
        rows = []
        for name, label in (("tau", "time constant"), ("sensor_tau", "sensor lag")):
            reads = partial(_read_time, label)
            rows.append(
                NumberRow(desk, name, label, f"{label} [s]", Ladder.of_times, reads, _write_time)
            )
        for name, label in (("on_level", "settles, on"), ("off_level", "settles, off")):
            says = f"where the process value settles with the load {name.split('_')[0]}"
            reads, writes = partial(self._read_level, label), self._write_level
            rows.append(NumberRow(desk, name, label, says, self._levels, reads, writes))
        for name, label in (("rate_on", "rate, on"), ("rate_off", "rate, off")):
            says = f"rate of change with the load {name.split('_')[1]}, per second"
            reads, writes = partial(self._read_rate, label), self._write_rate
            rows.append(NumberRow(desk, name, label, says, Ladder.of_rates, reads, writes))
        rows.append(
            NumberRow(
                desk,
                "dead_time",
                "dead time",
                "dead time [s], such as 30, or 30 / 10 for on and off",
                Ladder.of_dead_times,
                _read_dead_time,
                _write_dead_time,
            )
        )
        return rows

    def _levels(self, middle: float) -> Ladder:
        return Ladder.of_levels(middle, self._step())

    def _read_level(self, name: str, text: str) -> float:
        return read(text, unit=self._unit, name=name)

    def _write_level(self, value: float) -> str:
        return write_level(value, self._unit)

    def _read_rate(self, name: str, text: str) -> float:
        return read(text, unit=self._per_second, name=name)

    def _write_rate(self, value: float) -> str:
        return amount(value, self._per_second)

    @property
    def _per_second(self) -> str:
        return f"{self._unit}/s" if self._unit else ""


def write_level(value: float, unit: str) -> str:
    """Write a process value in its unit itself: a level in m does not turn into mm.

    Parameters
    ----------
    value : float
        In `unit`.
    unit : str
        Of the process value.

    Returns
    -------
    str
        Reads back exactly.

    Examples
    --------
    >>> write_level(0.8, "m"), write_level(-14.0, "°C")
    ('0.8 m', '-14 °C')
    """
    short = f"{value:.9g}"
    return f"{short if float(short) == value else repr(value)} {unit}".rstrip()


def _read_time(name: str, text: str) -> float:
    return read(text, unit="s", name=name)


def _write_time(value: float) -> str:
    return amount(value, "s")


def _read_dead_time(text: str) -> Times:
    pieces = text.split(_PAIR.strip())
    if len(pieces) > 2:
        fault = Fault("dead time has more than two parts.", asked=text, remedy="30, or 30 / 10")
        raise InputError.of("this entry", [fault])
    times = [_read_time("dead time", piece) if piece.strip() else 0.0 for piece in pieces]
    return times[0] if len(times) == 1 else (times[0], times[1])


def _write_dead_time(value: Times) -> str:
    times = value if isinstance(value, tuple) else (value,)
    return _PAIR.join(_write_time(time) for time in times)
