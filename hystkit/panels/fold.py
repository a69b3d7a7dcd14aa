"""A section that folds away under a heading with a summary."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import ipywidgets as widgets

from hystkit.panels.desk import Changes, Desk


class Fold:
    """A heading that opens and closes what stands below it.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    title : str
        Of the section.
    """

    def __init__(self, desk: Desk, title: str) -> None:
        kit = desk.kit
        self._title = title
        self.button = kit.make(
            widgets.ToggleButton,
            "fold",
            value=False,
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )
        self.summary = kit.label("", "summary")
        head = kit.make(
            widgets.HBox,
            children=[self.button, self.summary],
            layout={"width": "100%", "margin": "0", "grid_gap": "10px", "align_items": "baseline"},
        )
        self._layout = kit.own_layout(width="100%", margin="0", display="none")
        self._content = kit.make(widgets.VBox, "folded")
        self._content.layout = self._layout
        desk.listen(self.button, self._turned, lambda _: None)
        self.widget = kit.make(
            widgets.VBox,
            "section",
            children=[head, self._content],
            layout={"width": "100%", "margin": "0"},
        )
        self._label()

    def fill(self, content: Sequence[Any]) -> None:
        """Set what folds away.

        Parameters
        ----------
        content : sequence of ipywidgets.DOMWidget
            From top to bottom.
        """
        self._content.children = tuple(content)

    def summarise(self, summary: str) -> None:
        """Set what stands beside the title.

        Parameters
        ----------
        summary : str
            HTML, escaped.
        """
        self.summary.value = f'<span class="hystkit-quiet">{summary}</span>'

    def _turned(self, opened: bool) -> Changes:
        self._layout.display = "" if opened else "none"
        self._label()
        return {}

    def _label(self) -> None:
        opened = self.button.value
        self.button.description = f"{'▾' if opened else '▸'} {self._title}"
        self.button.tooltip = f"{'close' if opened else 'open'} {self._title}"
