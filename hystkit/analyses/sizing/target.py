"""Wanted trip points in volts, and how far trips lie from them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.numeric.views import Interval


@dataclass(frozen=True)
class Target:
    """Wanted trip points [V].

    Attributes
    ----------
    upper, lower : tuple of float
        Window of each trip, at the nominal supply; both ends are equal where a number was given.
    follows : float or None
        Nominal V_CC of a ratiometric signal, whose windows move in proportion with V_CC [V].
    """

    upper: Interval
    lower: Interval
    follows: float | None = None

    @property
    def has_windows(self) -> bool:
        """Whether both trips are windows."""
        return self.upper[0] < self.upper[1] and self.lower[0] < self.lower[1]

    @property
    def width(self) -> float:
        """Wanted width, between the middles of the windows [V]."""
        return (sum(self.upper) - sum(self.lower)) / 2

    def error(self, upper: Any, lower: Any, v_cc: Any = None) -> Any:
        """Largest distance of a trip from the middle of its window.

        Parameters
        ----------
        upper, lower : float or ndarray
            Trip points [V].
        v_cc : float or ndarray, optional
            Supply that they hold at [V]; nominal when left out.

        Returns
        -------
        float or ndarray
            [V]; with windows, in half-widths of the window, without unit: at most 1 where both
            trips lie within theirs. Infinite where a trip is not finite.
        """
        return self.farthest((upper, upper), (lower, lower), v_cc)

    def farthest(self, upper: tuple[Any, Any], lower: tuple[Any, Any], v_cc: Any = None) -> Any:
        """Largest error over ranges of both trips.

        Parameters
        ----------
        upper, lower : pair of float or ndarray
            Lowest and highest of each trip [V].
        v_cc : float or ndarray, optional
            Supply that they hold at [V]; nominal when left out.

        Returns
        -------
        float or ndarray
            As `error`.
        """
        found = [
            np.maximum(middle - low, high - middle) / unit
            for (low, high), (middle, unit) in self._scaled(upper, lower, v_cc)
        ]
        # A point without trips is as far away as can be, and must not hide behind NaN.
        return np.nan_to_num(np.maximum(*found), nan=np.inf, posinf=np.inf)

    def nearest(self, upper: tuple[Any, Any], lower: tuple[Any, Any], v_cc: Any = None) -> Any:
        """Lower bound of the error over ranges of both trips.

        Parameters
        ----------
        upper, lower : pair of float or ndarray
            Lowest and highest of each trip [V].
        v_cc : float or ndarray, optional
            Supply that they hold at [V]; nominal when left out.

        Returns
        -------
        float or ndarray
            Unit as of `error`; 0 where nothing can be told.
        """
        found = [
            np.maximum(low - middle, middle - high) / unit
            for (low, high), (middle, unit) in self._scaled(upper, lower, v_cc)
        ]
        return np.maximum(np.nan_to_num(np.maximum(*found), nan=0.0, neginf=0.0), 0.0)

    def margin(self, upper: tuple[Any, Any], lower: tuple[Any, Any], v_cc: Any = None) -> Any:
        """Smallest distance of ranges of both trips from the ends of their windows.

        Parameters
        ----------
        upper, lower : pair of float or ndarray
            Lowest and highest of each trip [V].
        v_cc : float or ndarray, optional
            Supply that they hold at [V]; nominal when left out.

        Returns
        -------
        float or ndarray
            [V]; negative where a window is left.
        """
        scale = self._scale(v_cc)
        pairs = ((upper, self.upper), (lower, self.lower))
        found = [np.minimum(low - a * scale, b * scale - high) for (low, high), (a, b) in pairs]
        return np.minimum(*found)

    def _scaled(self, upper: Any, lower: Any, v_cc: Any) -> list[tuple[Any, tuple[Any, Any]]]:
        """Ranges of trips with middle and unit of their windows."""
        scale = self._scale(v_cc)
        halves = self.has_windows
        return [
            (trip, ((a + b) / 2 * scale, (b - a) / 2 * scale if halves else 1.0))
            for trip, (a, b) in ((upper, self.upper), (lower, self.lower))
        ]

    def _scale(self, v_cc: Any) -> Any:
        return 1.0 if self.follows is None or v_cc is None else v_cc / self.follows
