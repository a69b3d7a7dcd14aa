"""In which order candidates are offered."""

from __future__ import annotations

from hystkit.analyses.sizing.candidate import Candidate

#: Combinations of smallest error that are compared by their yield where windows cannot be held.
COMPARED = 32
# Yields are equal to this many digits.
_DIGITS = 4


def rounded_error(candidate: Candidate) -> float:
    """Give the error that a search minimises; equal to nine digits is equal.

    Parameters
    ----------
    candidate : Candidate
        With windows over all tolerances, else at nominal values.

    Returns
    -------
    float
        As `Target.error`.
    """
    error = candidate.worst_error if candidate.target.has_windows else candidate.error
    return round(error, 9)


def ranked(found: tuple[Candidate, ...]) -> tuple[Candidate, ...]:
    """Put candidates in the order in which they are offered.

    Parameters
    ----------
    found : tuple of Candidate
        The smallest error first.

    Returns
    -------
    tuple of Candidate
        Those that hold stay in front, in the order of their error. Where a window is left, the
        candidate with the least excess in the worst case is not the one that leaves it least
        often: the others follow by yield, of equal yield by their error.
    """
    return tuple(sorted(found, key=_missed))


def _missed(candidate: Candidate) -> float:
    """Share of units that leave a window; below all of these for whatever holds."""
    chance = None if candidate.holds else candidate.expected_yield
    return -1.0 if chance is None else round(1 - chance.value, _DIGITS)
