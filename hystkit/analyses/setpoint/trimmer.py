"""A trimmer: a resistance with a wiper that a screw moves."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from hystkit.base.errors import DesignError, Fault, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import parse_percent, read, show
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity, collect, set_frozen

#: Where a trimmer sits: between R_T and R_B with its wiper at the input, or in series with R_F as
#: a variable resistor.
PLACES = ("divider", "feedback")


@dataclass(frozen=True)
class Trimmer(Viewed):
    """A trimmer, as its datasheet describes it.

    Parameters
    ----------
    total : float or str
        Resistance between the ends [Ohm].
    total_tol : float or str, default 0.1
        Its relative tolerance.
    end_resistance : float or str, default 0
        Most that remains between the wiper and an end when the wiper is there [Ohm].
    turns : float, default 1
        Turns of the screw over the whole travel.
    setting_resolution : float or str, default 0
        Smallest step that the wiper can be set by, relative to the total.

    Raises
    ------
    DesignError
        Naming everything that cannot be used.

    Examples
    --------
    >>> trimmer = Trimmer("10k", end_resistance=20, turns=25, setting_resolution="0.05 %")
    >>> trimmer.total, trimmer.setting_resolution
    (10000.0, 0.0005)
    """

    total: float
    total_tol: float = 0.1
    end_resistance: float = 0.0
    turns: float = 1.0
    setting_resolution: float = 0.0

    def __init__(
        self,
        total: Quantity,
        total_tol: Quantity = 0.1,
        end_resistance: Quantity = 0.0,
        turns: float = 1.0,
        setting_resolution: Quantity = 0.0,
    ) -> None:
        faults: list[Fault] = []
        read_as = {
            "total": lambda: read(total, unit="Ω", name="total"),
            "total_tol": lambda: parse_percent(total_tol, name="total_tol"),
            "end_resistance": lambda: read(end_resistance, unit="Ω", name="end_resistance"),
            "turns": lambda: read(turns, name="turns"),
            "setting_resolution": lambda: parse_percent(
                setting_resolution, name="setting_resolution"
            ),
        }
        for name, reader in read_as.items():
            set_frozen(self, name, collect(faults, reader))
        faults += self._faults()
        if faults:
            raise DesignError.of("this trimmer", faults)

    def wiper(self, setting: Any, total: Any = None, end: Any = None) -> Any:
        """Resistance between the wiper and the end where the setting is 0.

        Parameters
        ----------
        setting : float or ndarray
            Share of the travel, 0 to 1.
        total, end : float or ndarray, optional
            Total and end resistance of one unit [Ohm]; as stated when left out.

        Returns
        -------
        float or ndarray
            [Ohm].
        """
        total = self.total if total is None else total
        end = self.end_resistance if end is None else end
        return end + setting * (total - 2 * end)

    def _faults(self) -> list[Fault]:
        # What could not be read is NaN here, and a fault already: it compares false.
        rules = [
            (self.total <= 0, "total", "Ω", "total > 0", "10k"),
            (not 0 <= self.total_tol < 1 and self.total_tol == self.total_tol, "total_tol", "",
             "0 <= total_tol < 1", '"10 %"'),
            (self.end_resistance < 0, "end_resistance", "Ω", "end_resistance >= 0", "20"),
            (2 * self.end_resistance >= self.total * (1 - self.total_tol), "end_resistance", "Ω",
             "both end resistances together are less than the least total", "a smaller one"),
            (self.turns <= 0, "turns", "", "turns > 0", "1, or 25 for a multi-turn trimmer"),
            (not 0 <= self.setting_resolution < 1
             and self.setting_resolution == self.setting_resolution, "setting_resolution", "",
             "0 <= setting_resolution < 1, relative to the total", '"0.1 %"'),
        ]  # fmt: skip
        return [
            Fault(
                f"{name} of a trimmer is outside its range.",
                asked=f"{name} = {show(getattr(self, name), unit)}",
                rule=rule,
                remedy=remedy,
            )
            for broken, name, unit, rule, remedy in rules
            if broken
        ]

    def _fields(self) -> Sequence[Field]:
        return (
            Field("total", self.total, "Ω", f"± {show(self.total_tol, '%')}"),
            Field("end resistance", self.end_resistance, "Ω"),
            Field("turns", f"{self.turns:g}"),
            Field("setting resolution", show(self.setting_resolution, "%"), "", "of the total"),
        )


def check_place(design: Design, place: str) -> None:
    """Refuse a place for a trimmer that a design does not have.

    Parameters
    ----------
    design : Design
        Whose resistors are the padding of the trimmer.
    place : str
        One of `PLACES`.

    Raises
    ------
    InputError
        If there is no such place, or the design has no divider or R_F.
    """
    if place not in PLACES:
        raise InputError(
            "there is no such place for a trimmer.",
            asked=f"place={place!r}",
            have=", ".join(PLACES),
            remedy="one of these",
        )
    needed = padded(place)
    built_in = not design.stage.is_custom or place == "feedback"
    missing = [name for name in needed if name not in design.parts or not built_in]
    if missing:
        raise InputError(
            f"a trimmer in the {place} needs {' and '.join(needed)}.",
            asked=design.stage.title,
            have=f"no {', '.join(missing)}" if built_in else "an own circuit",
            rule="the trimmer sits between R_T and R_B, or in series with R_F",
            remedy="as_divider(design).design"
            if place == "divider" and design.stage.reference in ("source", "ground")
            else "a form that has them",
        )


def padded(place: str) -> tuple[str, ...]:
    """Give the names of the resistors that a trimmer adds to.

    Parameters
    ----------
    place : str
        One of `PLACES`.

    Returns
    -------
    tuple of str
        R_T and R_B, or R_F.
    """
    return ("R_T", "R_B") if place == "divider" else ("R_F",)


def fitted(place: str, padding: Mapping[str, Any], total: Any, wiper: Any) -> dict[str, Any]:
    """Add a trimmer to its padding resistors.

    Parameters
    ----------
    place : str
        One of `PLACES`.
    padding : mapping of str to float or ndarray
        The resistors themselves [Ohm].
    total : float or ndarray
        Resistance between the ends [Ohm].
    wiper : float or ndarray
        Resistance between the wiper and the end where the setting is 0 [Ohm].

    Returns
    -------
    dict
        R_T and R_B, or R_F, with the trimmer [Ohm].
    """
    if place == "feedback":
        return {"R_F": padding["R_F"] + wiper}
    return {"R_T": padding["R_T"] + total - wiper, "R_B": padding["R_B"] + wiper}
