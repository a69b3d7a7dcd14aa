"""The trip points of a stage, live: ruler, switching loop, schematic, law and table."""

from __future__ import annotations

from hystkit.panels.loop_figure import LoopFigure


class TripPanel(LoopFigure):
    """Choose a form, move parts, and see trip points, loop, schematic and law follow.

    Parameters
    ----------
    design : Design
        What to begin with.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    result : TripPoints
        Its trip points.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> panel = TripPanel(header_tank())
    >>> panel.set(R_F="220k")
    >>> print(f"{panel.result.width:.3f} V")
    0.358 V
    >>> panel.close()
    """
