"""One finding, and the list of them that a review gives."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from hystkit.base.errors import UnknownNameError
from hystkit.base.fields import Field, Viewed
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import show

#: Severities, the worst first, and the sign of each, so that colour is not alone in telling them.
SIGNS = {"fault": "✗", "warning": "!", "note": "–", "pass": "✓"}


@dataclass(frozen=True)
class Finding:
    """What one check found.

    Attributes
    ----------
    name : str
        Name of the check, such as "common mode".
    severity : {"fault", "warning", "note", "pass"}
        Whether the stage fails, is marginal, is as stated, or passes.
    text : str
        What was found, with numbers.
    margin : float
        Distance from the limit in `unit`, negative beyond it; NaN where there is none.
    unit : str
        Unit of the margin.
    remedy : str
        What to change; empty where nothing needs to be.
    """

    name: str
    severity: str
    text: str
    margin: float = math.nan
    unit: str = ""
    remedy: str = ""

    def __str__(self) -> str:
        """Return the finding in one line."""
        note = _note(self)
        return f"{SIGNS[self.severity]} {self.name}: {self.text}{f' ({note})' if note else ''}"


@dataclass(frozen=True)
class Review(Viewed):
    """Findings on a design, the worst first; behaves like a sequence of them.

    Attributes
    ----------
    findings : tuple of Finding
        One at least for each check that applies.
    """

    findings: tuple[Finding, ...]

    def __len__(self) -> int:
        """Return the number of findings."""
        return len(self.findings)

    def __iter__(self) -> Iterator[Finding]:
        """Iterate from the worst."""
        return iter(self.findings)

    def __getitem__(self, name: str) -> Finding:
        """Return the worst finding of the check of this name."""
        for finding in self.findings:
            if finding.name == name:
                return finding
        raise UnknownNameError.of("this review", [unknown_name_fault("finding", name, self.names)])

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the checks that found something to say."""
        return tuple(dict.fromkeys(finding.name for finding in self.findings))

    @property
    def worst(self) -> str:
        """Severity of the worst finding."""
        return min((f.severity for f in self.findings), key=list(SIGNS).index, default="pass")

    def count(self, severity: str) -> int:
        """Count the findings of a severity.

        Parameters
        ----------
        severity : {"fault", "warning", "note", "pass"}
            Which.

        Returns
        -------
        int
            How many.
        """
        return sum(finding.severity == severity for finding in self.findings)

    def _fields(self) -> Sequence[Field]:
        return [
            Field(f"{SIGNS[f.severity]} {f.name}", f.text, "", _note(f), "") for f in self.findings
        ]


def _note(finding: Finding) -> str:
    margin = "" if math.isnan(finding.margin) else f"margin {show(finding.margin, finding.unit, 3)}"
    return "; ".join(text for text in (margin, finding.remedy) if text)
