"""From wanted trip points to real parts: the whole grid of preferred values is searched."""

from hystkit.analyses.sizing.candidate import Candidate, Sizing, Suggestion
from hystkit.analyses.sizing.size import size
from hystkit.analyses.sizing.target import Limits

__all__ = ["Candidate", "Limits", "Sizing", "Suggestion", "size"]
