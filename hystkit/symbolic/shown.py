"""How formulas show in a notebook: as text, as LaTeX, and as MathML for pages without scripts."""

from __future__ import annotations

from abc import ABC, abstractmethod
from typing import Any

import sympy as sp


class Equations(ABC):
    """Equations that are read one below the other; a subclass gives `rows`."""

    @property
    @abstractmethod
    def rows(self) -> tuple[tuple[sp.Symbol, sp.Expr], ...]:
        """What is defined, and what it is, in reading order."""

    def to_text(self) -> str:
        """Write the equations as lines of plain text.

        Returns
        -------
        str
            One line for each.
        """
        return "\n".join(f"{left} = {right}" for left, right in self.rows)

    def __str__(self) -> str:
        """Return the text view."""
        return self.to_text()

    def _repr_mimebundle_(self, **kwargs: Any) -> dict[str, str]:
        # Both build on laws.
        from hystkit.symbolic.mathml import MIME, formula_mathml
        from hystkit.symbolic.writing import formula

        return {
            "text/plain": self.to_text(),
            "text/latex": f"$\\displaystyle {formula(self.rows)}$",
            MIME: formula_mathml(self.rows),
        }
