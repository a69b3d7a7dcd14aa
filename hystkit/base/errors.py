"""Every error that hystkit raises on purpose.

::

    HystkitError
    ├── InputError (ValueError)                 the input cannot be used
    │   ├── QuantityError                       not a number, not finite, or in a wrong unit
    │   ├── DesignError                         a stage or design that cannot be built
    │   ├── UnknownNameError (KeyError)         a name that does not exist here
    │   ├── RecordError                         a design file that cannot be read
    │   ├── NoiseModelError                     noise that has no finite crossing rate
    │   ├── SignalError                         a sensor description that cannot be used
    │   └── PlantError                          a plant that cannot be used
    ├── InfeasibleError (ValueError)            no real part values give what was asked for
    │   └── InfeasibleWidthError                ... because of the width
    └── OutputExistsError (FileExistsError)     would overwrite a file

Each says what was asked, what was found, and what to do; the faults of one input come together.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Self


@dataclass(frozen=True)
class Fault:
    """One thing that is wrong with an input.

    Parameters
    ----------
    problem : str
        What is wrong, as one sentence.
    asked : str, optional
        What was asked for.
    have : str, optional
        What was found instead.
    rule : str, optional
        The rule that links the two.
    remedy : str, optional
        What to do about it.
    """

    problem: str
    asked: str = ""
    have: str = ""
    rule: str = ""
    remedy: str = ""

    def __str__(self) -> str:
        """Return the problem, and under it the rows that are filled in."""
        return "\n".join([self.problem, *self._rows()])

    def _rows(self) -> Iterator[str]:
        rows = {"asked": self.asked, "have": self.have, "rule": self.rule, "try": self.remedy}
        for label, text in rows.items():
            if text:
                yield f"  {label:<6}  {_hang(text, 10)}"


class HystkitError(Exception):
    """Base of all errors that hystkit raises on purpose.

    Parameters
    ----------
    problem : str
        What is wrong; with `faults`, the line that stands above them.
    asked, have, rule, remedy : str, optional
        As in `Fault`; not used with `faults`.
    faults : sequence of Fault, optional
        Several faults of one input, reported together.

    Attributes
    ----------
    faults : tuple of Fault
        All faults; never empty.
    """

    faults: tuple[Fault, ...]

    def __init__(
        self,
        problem: str,
        *,
        asked: str = "",
        have: str = "",
        rule: str = "",
        remedy: str = "",
        faults: Sequence[Fault] = (),
    ) -> None:
        super().__init__(problem)
        self.problem = problem
        self.faults = tuple(faults) or (Fault(problem, asked, have, rule, remedy),)

    @classmethod
    def of(cls, subject: str, faults: Sequence[Fault]) -> Self:
        """Return one error that reports every fault of an input.

        Parameters
        ----------
        subject : str
            What the faults were found in, such as ``"the design"``.
        faults : sequence of Fault
            At least one. A single fault speaks for itself, without a number.

        Raises
        ------
        ValueError
            If there is no fault to report.
        """
        if not faults:
            raise ValueError(f"no faults to report in {subject}")
        if len(faults) == 1:
            return cls(faults[0].problem, faults=faults)
        return cls(f"{len(faults)} faults in {subject}:", faults=faults)

    def __str__(self) -> str:
        """Return the whole report; Python puts the name of the class in front."""
        if len(self.faults) == 1:
            return str(self.faults[0])
        numbered = (f"  {n}  {_hang(str(fault), 5)}" for n, fault in enumerate(self.faults, 1))
        return "\n".join([self.problem, *numbered])


class InputError(HystkitError, ValueError):
    """The input cannot be used."""


class QuantityError(InputError):
    """Text that is not a number, is not finite or is in a wrong unit."""


class DesignError(InputError):
    """A stage, device, supply or design that cannot be built."""


class UnknownNameError(InputError, KeyError):
    """A name that does not exist here."""


class RecordError(InputError):
    """A design file that cannot be read."""


class NoiseModelError(InputError):
    """Noise whose crossing rate is not finite, or cannot be told from what is given."""


class SignalError(InputError):
    """A sensor description that cannot be used."""


class PlantError(InputError):
    """A plant description that cannot be used."""


class InfeasibleError(HystkitError, ValueError):
    """No real part values give what was asked for."""


class InfeasibleWidthError(InfeasibleError):
    """No real part values give the width that was asked for."""


class OutputExistsError(HystkitError, FileExistsError):
    """Writing would overwrite a file that is already there."""


def _hang(text: str, width: int) -> str:
    """Indent every line of `text` but the first."""
    return text.replace("\n", "\n" + " " * width)
