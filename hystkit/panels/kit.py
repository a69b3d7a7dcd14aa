"""The widgets of one panel: made in one place, so that all of them can be closed again."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import ipywidgets as widgets

_Key = tuple[object, ...]


class Kit:
    """Makes widgets and remembers them.

    A widget brings a layout and a style, each a widget of its own with a message of its own; equal
    ones are shared, which halves what a front end has to load.
    """

    def __init__(self) -> None:
        self._made: list[Any] = []
        self._layouts: dict[_Key, Any] = {}
        self._styles: dict[_Key, Any] = {}

    def make(
        self,
        kind: type[Any],
        *classes: str,
        layout: Mapping[str, str | None] | None = None,
        style: Mapping[str, str] | None = None,
        **traits: Any,
    ) -> Any:
        """Make a widget.

        Parameters
        ----------
        kind : type
            Class of ipywidgets.
        *classes : str
            CSS classes, "hystkit-" is put in front.
        layout : mapping, optional
            Traits of its layout.
        style : mapping, optional
            Traits of its style.
        **traits : object
            Its own traits.

        Returns
        -------
        ipywidgets.DOMWidget
            The widget.
        """
        traits["layout"] = self.layout(**(layout or {}))
        key: _Key = (kind, *sorted((style or {}).items()))
        if key in self._styles:
            traits["style"] = self._styles[key]
        elif style:
            traits["style"] = dict(style)
        classes_given = [f"hystkit-{name}" for name in classes]
        made = kind(_dom_classes=classes_given, **traits)
        self._made.append(made)
        if hasattr(made, "style"):
            self._styles.setdefault(key, made.style)
        return made

    def label(self, text: str, kind: str = "label") -> Any:
        """Make a piece of HTML that takes the room it needs.

        Parameters
        ----------
        text : str
            HTML; whatever a user may have written in it is escaped.
        kind : str, default "label"
            Its CSS class.

        Returns
        -------
        ipywidgets.HTML
            The label.
        """
        return self.make(widgets.HTML, kind, value=text, layout={"width": "auto", "min_width": "0"})

    def layout(self, **traits: str | None) -> Any:
        """Give the layout with these traits, shared by all that ask for the same.

        Parameters
        ----------
        **traits : str
            Traits of the layout.

        Returns
        -------
        ipywidgets.Layout
            Not to be changed afterwards.
        """
        key: _Key = tuple(sorted(traits.items()))
        if key not in self._layouts:
            self._layouts[key] = widgets.Layout(**traits)
        return self._layouts[key]

    def own_layout(self, **traits: str | None) -> Any:
        """Give a layout that may be changed afterwards.

        Parameters
        ----------
        **traits : str
            Traits of the layout.

        Returns
        -------
        ipywidgets.Layout
            Of one widget only.
        """
        layout = widgets.Layout(**traits)
        self._made.append(layout)
        return layout

    def close(self) -> None:
        """Close every widget made here, with its layout and style."""
        for made in (*self._made, *self._layouts.values(), *self._styles.values()):
            made.unobserve_all()
            made.close()
        self._made.clear()
        self._layouts.clear()
        self._styles.clear()
