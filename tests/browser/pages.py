"""What the browser tests share: a page that is watched, designs, and Python's side of a state."""

from __future__ import annotations

import random
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import hystkit as hk
from hystkit.export.page.model import state_data

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator, Page

#: Turns numbers that JSON does not know into text on their way out of the page.
PLAIN = "(k, v) => typeof v === 'number' && !Number.isFinite(v) ? String(v) : v"


@dataclass
class Watched:
    """A browser page, and everything that it asked for or complained about."""

    page: Page
    requests: list[str] = field(default_factory=list)
    complaints: list[str] = field(default_factory=list)

    def all_quiet(self) -> None:
        """Assert that nothing was fetched and nothing went wrong."""
        assert self.requests == []
        assert self.complaints == []


@contextmanager
def watched(browser: Browser, own: str = "", **options: Any) -> Iterator[Watched]:
    """Open a page whose every request but those for its own files is refused and noted.

    Parameters
    ----------
    browser : Browser
        The browser.
    own : str
        Start of the addresses that are its own files.
    **options
        Of the browser context, such as viewport or java_script_enabled.
    """
    context = browser.new_context(**{"viewport": {"width": 1280, "height": 900}, **options})
    page = context.new_page()
    seen = Watched(page)

    def answer(route: Any) -> None:
        address = route.request.url
        if own and address.startswith(own):
            route.continue_()
        else:
            seen.requests.append(address)
            route.abort()

    context.route("**/*", answer)
    page.on("console", lambda m: seen.complaints.append(f"{m.type}: {m.text}"))
    page.on("pageerror", lambda error: seen.complaints.append(str(error)))
    try:
        yield seen
    finally:
        context.close()


def settings(design: hk.Design, count: int, seed: int) -> list[hk.Design]:
    """Vary every value of a design at random; the form and the sensor stay.

    Parameters
    ----------
    design : Design
        With the form, the optional parts and the signal.
    count : int
        How many.
    seed : int
        Of the random numbers.
    """
    rng = random.Random(seed)
    return [_varied(design, rng) for _ in range(count)]


def _varied(design: hk.Design, rng: random.Random) -> hk.Design:
    stage = design.stage
    split = stage.supply == "split"
    high = rng.uniform(3.0, 24.0)
    low = -rng.uniform(3.0, 15.0) if split else 0.0
    tol = lambda: rng.choice([0.0, 0.001, 0.01, 0.05])  # noqa: E731
    levels = {
        "V_REF": hk.Part(rng.uniform(low, high), tol()),
        "V_PU": hk.Part(rng.uniform(0.7 * high, 1.5 * high), tol()),
        "V_L": hk.Part(rng.uniform(low, high), tol()),
        "V_OL": hk.Part(low + rng.uniform(0.0, 0.2), tol()),
        "V_OH": hk.Part(high - rng.uniform(0.0, 0.2), tol()),
    }
    given = {n: p for n, p in levels.items() if n in stage.levels}
    kept = {n: p for n, p in given.items() if n == "V_REF" or rng.random() < 0.4}
    device = hk.Device(
        drop_high=rng.uniform(0.0, 0.3),
        drop_low=rng.uniform(0.0, 0.3),
        r_high=rng.choice([0.0, rng.uniform(1.0, 300.0)]),
        r_low=rng.choice([0.0, rng.uniform(1.0, 300.0)]),
        leakage=rng.choice([0.0, rng.uniform(0.0, 1e-7)]),
        offset=rng.uniform(-5e-3, 5e-3),
        bias_plus=rng.uniform(-1e-7, 1e-7),
        bias_minus=rng.uniform(-1e-7, 1e-7),
        common_mode_low=rng.choice([None, 0.0, -0.3]),
        common_mode_high=rng.choice([0.0, 1.5]),
        limits=design.device.limits,
    )
    return hk.Design(
        stage,
        {name: hk.Part(10 ** rng.uniform(2.5, 6.0), tol()) for name in stage.parts},
        supply=hk.Supply(high, low if split else None, tol=rng.choice([0.0, 0.02])),
        device=device,
        levels=kept,
        signal=design.signal,
    )


def states(designs: list[hk.Design]) -> list[dict[str, Any]]:
    """Write designs as states of their page."""
    return [state_data(design) for design in designs]


def deviation(found: Any, expected: float | None) -> float:
    """Relative distance of a number that came out of a page; infinite where one has none."""
    if expected is None or found is None:
        return 0.0 if found is expected else float("inf")
    value = float(found)
    if value == expected or (value != value and expected != expected):
        return 0.0
    distance = abs(value - expected) / abs(expected) if expected else float("inf")
    return distance if distance == distance else float("inf")


def cell(page: Page, name: str) -> str:
    return page.locator(f"td [data-cell='{name}']").inner_text()


def entry(page: Page, name: str, look: str = "hk-value") -> Locator:
    return page.locator(f".hk-row[data-name='{name}'] .{look}")


def slider(page: Page, name: str) -> Locator:
    return page.locator(f".hk-row[data-name='{name}'] input[type=range]")


def until(page: Page, condition: str) -> None:
    """Wait for a condition; playwright's own way needs eval, which the policy forbids."""
    for _ in range(100):
        if page.evaluate(condition):
            return
        page.wait_for_timeout(50)
    raise AssertionError(f"never came true: {condition}")


def type_in(page: Page, name: str, text: str, look: str = "hk-value") -> None:
    entry(page, name, look).fill(text)
    entry(page, name, look).press("Enter")
