"""How the controls of a panel talk to it: proposals in, refusals shown, nothing swallowed."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from typing import Any

from hystkit.base.errors import Fault, HystkitError
from hystkit.panels.kit import Kit
from hystkit.panels.revise import Spare

#: A change of the design, as `Panel.set` takes it.
Changes = Mapping[str, Any]


class Desk:
    """What a panel gives its controls.

    Parameters
    ----------
    apply : callable
        Takes a proposed change; raises `HystkitError` where it cannot be.
    restore : callable
        Makes all controls show the model again.
    report : callable
        Takes what was being done and an exception that nobody expected.

    Attributes
    ----------
    kit : Kit
        Makes the widgets.
    spare : Spare
        Parts and levels of forms that were left.
    typed : bool
        Whether a field may hold something else than what the model says, in other letters or
        refused, since `restore` was called last.
    """

    def __init__(
        self,
        apply: Callable[[Changes], None],
        restore: Callable[[], None],
        report: Callable[[str, Exception], None],
    ) -> None:
        self.kit = Kit()
        self.spare = Spare()
        self.typed = True
        self._apply = apply
        self._restore = restore
        self._report = report
        self._silent = False

    def listen(
        self,
        widget: Any,
        read: Callable[[Any], Changes],
        say: Callable[[str], None],
        *,
        keep: bool = False,
    ) -> None:
        """Turn what is done to a widget into proposals.

        Parameters
        ----------
        widget : ipywidgets.DOMWidget
            Its `value` is watched.
        read : callable
            Gives the change that a new value stands for.
        say : callable
            Shows why it is refused, beside the widget.
        keep : bool, default False
            Whether a refused value stays to be mended, as typed text should.
        """

        def heard(change: Mapping[str, Any]) -> None:
            if not self._silent:
                self.typed = self.typed or keep
                with self.guarded("a change"):
                    self._propose(lambda: read(change["new"]), say, keep)

        widget.observe(heard, names="value")

    @contextmanager
    def silence(self) -> Iterator[None]:
        """Set controls without hearing them."""
        before, self._silent = self._silent, True
        try:
            yield
        finally:
            self._silent = before

    @contextmanager
    def guarded(self, doing: str) -> Iterator[None]:
        """Report an exception in the panel, where a front end would drop it.

        Parameters
        ----------
        doing : str
            What is being done, for the report.
        """
        try:
            yield
        except Exception as error:
            self._report(doing, error)

    def _propose(
        self, changes: Callable[[], Changes], say: Callable[[str], None], keep: bool
    ) -> None:
        try:
            self._apply(changes())
        except HystkitError as error:
            if not keep:
                self._restore()
            say(why(error))


def why(error: HystkitError) -> str:
    """Say in few words why something was refused.

    Parameters
    ----------
    error : HystkitError
        With all its faults.

    Returns
    -------
    str
        A sentence or two for each fault, plain text.
    """
    return " ".join(_in_short(fault) for fault in error.faults)


def _in_short(fault: Fault) -> str:
    first = fault.problem.split()[0]
    # Names keep their letters: r_low is not R_low.
    capital = fault.problem if "_" in first else fault.problem[:1].upper() + fault.problem[1:]
    remedy = f" Try {fault.remedy}." if fault.remedy else ""
    return capital + remedy
