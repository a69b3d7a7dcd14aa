"""Panels that ask something beside the design: a request with fields of its own."""

from __future__ import annotations

import html
from abc import abstractmethod
from collections.abc import Callable, Mapping, Sequence
from dataclasses import fields, replace
from typing import Any

import ipywidgets as widgets
from traitlets import Any as AnyTrait

from hystkit.circuit.design import Design
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.entries import Note, row_of, text_field
from hystkit.panels.revise import revised
from hystkit.panels.standard import StagePanel

#: Columns of a row with a label and a field for a request.
LABEL_AND_FIELD = "92px 1fr"


class AskingPanel(StagePanel):
    """A panel of one design and one request; both change in one step.

    Subclasses give `_first_request` and may give `_checked`.

    Parameters
    ----------
    design : Design
        What to begin with.
    **asked : object
        Fields of the request.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : object
        What is asked of it, a frozen dataclass; changed with `set`.
    """

    request = AnyTrait(read_only=True)

    def __init__(self, design: Design, **asked: Any) -> None:
        request = self._first_request()
        if isinstance(design, Design):
            request = self._checked(design, _replaced(request, asked))
        self.set_trait("request", request)
        super().__init__(design)

    @abstractmethod
    def _first_request(self) -> Any:
        """Return the request that a panel begins with, a frozen dataclass."""

    def _checked(self, design: Design, request: Any) -> Any:
        """Return the request, or raise a `HystkitError` where it cannot be asked of a design."""
        return request

    def set(self, **changes: Any) -> None:
        """Change several values at once, of the request and of the design.

        Parameters
        ----------
        **changes : object
            Fields of the request, and whatever `Panel.set` takes.

        Raises
        ------
        HystkitError
            Naming every fault; nothing is changed then.
        """
        names = {field.name for field in fields(self.request)}
        asked = {name: value for name, value in changes.items() if name in names}
        rest = {name: value for name, value in changes.items() if name not in names}
        design = revised(self.design, rest, self._desk.spare) if rest else self.design
        request = self.request
        if asked:
            request = self._checked(design, _replaced(request, asked))
        if request == self.request:
            self.design = design
            return
        self.set_trait("request", request)
        if design == self.design:
            self._changed({})
        else:
            self.design = design


class Asked:
    """A labelled field for one field of the request.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    name : str
        Of the field of the request.
    label : str
        What stands before it, HTML.
    says : str
        Accessible name.
    read : callable
        Gives the value for a typed text.
    write : callable
        Gives the text for a value; `read` gives the same value back.
    placeholder : str, default ""
        What the field shows while it is empty.
    clears : sequence of str, optional
        Fields of the request that become None when something is typed into this one.
    """

    def __init__(
        self,
        desk: Desk,
        name: str,
        label: str,
        says: str,
        read: Callable[[str], Any],
        write: Callable[[Any], str],
        placeholder: str = "",
        clears: Sequence[str] = (),
    ) -> None:
        self.name = name
        self._write = write

        def changes(text: str) -> Changes:
            cleared: Changes = dict.fromkeys(clears) if text.strip() else {}
            return {**cleared, name: read(text)}

        self.note = Note(desk)
        self.field = text_field(desk, says, "100%", placeholder)
        heading = desk.kit.label(label)
        desk.listen(self.field, changes, self.note.say, keep=True)
        self.widget = row_of(desk, LABEL_AND_FIELD, [heading, self.field], self.note)

    def show(self, value: Any) -> None:
        """Show a value.

        Parameters
        ----------
        value : object
            As the request has it.
        """
        self.note.clear()
        self.field.value = self._write(value)


class Chosen:
    """A labelled choice for one field of the request.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    name : str
        Of the field of the request.
    label : str
        What stands before it, plain text.
    options : mapping of str to object
        What can be chosen, by its label.
    """

    def __init__(self, desk: Desk, name: str, label: str, options: Mapping[str, Any]) -> None:
        self.name = name
        self._options = dict(options)
        self.note = Note(desk)
        # Labels only: a choice whose value were None would show as no choice.
        self.field = desk.kit.make(
            widgets.Dropdown,
            "field",
            options=list(options),
            tooltip=label,
            layout={"width": "100%", "min_width": "0", "margin": "0"},
        )
        heading = desk.kit.label(html.escape(label))
        desk.listen(self.field, lambda chosen: {name: self._options[chosen]}, self.note.say)
        self.widget = row_of(desk, LABEL_AND_FIELD, [heading, self.field], self.note)

    def show(self, value: Any) -> None:
        """Show a value.

        Parameters
        ----------
        value : object
            One of the options.
        """
        self.note.clear()
        self.field.value = next(n for n, option in self._options.items() if option == value)


class RequestSection:
    """The request as a section of the control column.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    title : str
        Its heading.
    rows : sequence of Asked or Chosen
        One for each field that is shown.
    find : callable
        Gives the request as it stands.
    foot : sequence of ipywidgets.DOMWidget, optional
        What stands below the rows.
    """

    def __init__(
        self,
        desk: Desk,
        title: str,
        rows: Sequence[Asked | Chosen],
        find: Callable[[], Any],
        foot: Sequence[Any] = (),
    ) -> None:
        self.rows = {row.name: row for row in rows}
        self._find = find
        heading = desk.kit.label(html.escape(title), "heading")
        self.widget = desk.kit.make(
            widgets.VBox,
            "section",
            children=[heading, *(row.widget for row in rows), *foot],
            layout={"width": "100%", "margin": "0"},
        )

    def show(self, design: Design) -> None:
        """Show the request.

        Parameters
        ----------
        design : Design
            The model; the request stands beside it.
        """
        request = self._find()
        for name, row in self.rows.items():
            row.show(getattr(request, name))


def _replaced(request: Any, asked: Changes) -> Any:
    return replace(request, **asked) if asked else request
