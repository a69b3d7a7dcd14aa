"""An immutable mapping of names."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any, NoReturn, TypeVar

from hystkit.base.errors import UnknownNameError
from hystkit.base.nearest import unknown_name_fault

V = TypeVar("V")


class Named(Mapping[str, V]):
    """Immutable mapping from names to values, kept in the order given.

    Two of them are equal when they hold the same pairs, in whatever order. Hashable when the
    values are; can be pickled and copied.

    Parameters
    ----------
    entries : mapping or iterable of pairs, optional
        The names and their values.
    **more : object
        Further entries.

    Examples
    --------
    >>> parts = Named(R_T=1e5, R_B=1e5)
    >>> parts.replacing(R_B=None, R_F=5.75e5)
    Named({'R_T': 100000.0, 'R_F': 575000.0})
    """

    __slots__ = ("_entries",)
    _entries: dict[str, V]

    def __init__(
        self, entries: Mapping[str, V] | Iterable[tuple[str, V]] = (), /, **more: V
    ) -> None:
        object.__setattr__(self, "_entries", dict(entries, **more))

    def replacing(self, **changes: V | None) -> Named[V]:
        """Return a changed copy.

        Parameters
        ----------
        **changes : object or None
            New values. A name that is there keeps its place, a new one goes last, and None
            leaves the name out.
        """
        merged = {**self._entries, **changes}
        return Named({name: value for name, value in merged.items() if value is not None})

    def __getitem__(self, name: str) -> V:
        """Return the value of `name`; `UnknownNameError` where there is none."""
        try:
            return self._entries[name]
        except KeyError:
            raise UnknownNameError.of(
                "this mapping", [unknown_name_fault("name", name, self._entries)]
            ) from None

    def __contains__(self, name: object) -> bool:
        """Whether `name` is there."""
        return name in self._entries

    def __iter__(self) -> Iterator[str]:
        """Iterate over the names, in order."""
        return iter(self._entries)

    def __len__(self) -> int:
        """Return the number of names."""
        return len(self._entries)

    def __hash__(self) -> int:
        """Hash by content; the order does not count, as in ``==``."""
        return hash(frozenset(self._entries.items()))

    def __repr__(self) -> str:
        """Return Python that rebuilds the mapping."""
        return f"Named({self._entries!r})"

    def __reduce__(self) -> tuple[type[Named[V]], tuple[dict[str, V]]]:
        """Pickle and copy through the constructor, past the guard on attributes."""
        return (type(self), (self._entries,))

    def __setattr__(self, name: str, value: Any) -> NoReturn:
        """Refuse; a changed copy comes from `replacing`."""
        raise AttributeError(f"Named is immutable; use replacing({name}=...) for a changed copy")

    def __delattr__(self, name: str) -> NoReturn:
        """Refuse; a copy without a name comes from `replacing`."""
        raise AttributeError(f"Named is immutable; use replacing({name}=None) for a changed copy")
