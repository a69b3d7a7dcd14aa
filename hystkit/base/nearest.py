"""The name that was probably meant."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches

from hystkit.base.errors import Fault


def nearest_name(name: str, known: Iterable[str]) -> str | None:
    """Return the known name closest to `name`.

    Case, underscores, hyphens and spaces do not count, so ``"vref"`` finds ``"V_REF"``.

    Parameters
    ----------
    name : str
        The name that was given.
    known : iterable of str
        The names that exist.

    Returns
    -------
    str or None
        None where nothing is close.

    Examples
    --------
    >>> nearest_name("R_FF", ["R_T", "R_B", "R_F"])
    'R_F'
    >>> nearest_name("vref", ["V_CC", "V_REF"])
    'V_REF'
    """
    # The first of two names with the same letters wins, so build the table backwards.
    by_letters = {_letters(each): each for each in reversed(list(known))}
    close = get_close_matches(_letters(name), list(by_letters), n=1)
    return by_letters[close[0]] if close else None


def unknown_name_fault(kind: str, name: object, known: Iterable[str]) -> Fault:
    """Return the fault of a name that does not exist.

    Parameters
    ----------
    kind : str
        What was named, such as ``"part"``.
    name : object
        What was given; usually a string.
    known : iterable of str
        The names that exist, in the order in which they are listed.
    """
    names = list(known)
    return Fault(
        f"there is no {kind} {str(name)!r} here.",
        asked=str(name),
        have=", ".join(names) or f"no {kind} at all",
        remedy=nearest_name(str(name), names) or "",
    )


def _letters(name: str) -> str:
    return "".join(c for c in name.casefold() if c not in "_- ")
