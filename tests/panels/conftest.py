"""A panel for each test, closed after it."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank

MakePanel = Callable[[hk.Design], hk.panels.TripPanel]


@pytest.fixture
def make() -> Iterator[MakePanel]:
    """Make panels that are closed after the test."""
    made: list[hk.panels.TripPanel] = []

    def one(design: hk.Design) -> hk.panels.TripPanel:
        made.append(hk.panels.TripPanel(design))
        return made[-1]

    yield one
    for panel in made:
        panel.close()


@pytest.fixture
def panel(make: MakePanel) -> hk.panels.TripPanel:
    """A panel of the header tank."""
    return make(header_tank())
