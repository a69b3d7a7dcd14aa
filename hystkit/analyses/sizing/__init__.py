"""From wanted trip points to real parts: the whole grid of preferred values is searched."""

from hystkit.analyses.sizing.candidate import BillLine, Candidate, Sizing, Suggestion
from hystkit.analyses.sizing.limits import Limits
from hystkit.analyses.sizing.size import size

__all__ = ["BillLine", "Candidate", "Limits", "Sizing", "Suggestion", "size"]
