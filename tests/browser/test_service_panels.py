"""The panels for cycle, noise and width in a real JupyterLab: by keys, typed and pressed."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING

import pytest

import hystkit as hk
from hystkit.base.quantity import show
from hystkit.circuit import preferred
from hystkit.circuit.demo import header_tank
from tests.browser.lab import Lab, jupyterlab
from tests.browser.pages import Watched, watched

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator, Page

pytestmark = pytest.mark.browser

CELLS = [
    "import traitlets\nimport hystkit as hk\nfrom hystkit.circuit.demo import header_tank\n"
    "tank = header_tank()\n"
    "plant = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, dead_time=20)",
    "cycle = hk.panels.CyclePanel(tank, plant=plant, operations=100e3).add_class('cycle')\ncycle",
    "spectrum = hk.Noise.two_pole(rms='50m', f1=100, f2='10k')\n"
    "noise = hk.panels.NoisePanel(tank, noise=spectrum, slope=0.5).add_class('noise')\n"
    "link = traitlets.link((cycle, 'design'), (noise, 'design'))\nnoise",
    # No width is wide enough for three starts an hour and narrow enough for a swing of 0.3 m.
    "weak = hk.Noise.two_pole(rms='5m', f1=100, f2='10k')\n"
    "hk.panels.WindowPanel(tank, plant=plant, noise=weak, starts_per_hour=3, swing=0.3)"
    ".add_class('width')",
]
PANELS = ("cycle", "noise", "width")
TALL = 7600
#: Width of a window below which pictures, tables and formulas are wider than a panel [px].
NARROW = 500
WIDE = ":is(.hystkit-view, .hystkit-table, .hystkit-math, .hystkit-numbers)"
PATIENCE_S = 15.0
_PAUSE_S = 0.05


@pytest.fixture(scope="module")
def lab(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    pytest.importorskip("jupyterlab", reason="JupyterLab is not installed")
    with jupyterlab(tmp_path_factory.mktemp("lab"), CELLS) as running:
        yield running


@pytest.fixture(scope="module")
def seen(lab: Lab, chromium: Browser) -> Iterator[Watched]:
    with watched(chromium, own=lab.url, viewport={"width": 1400, "height": TALL}) as found:
        lab.open(found.page)
        for name in PANELS:
            found.page.wait_for_function(
                "name => document.querySelectorAll("
                "`.${name} img.hystkit-picture[alt]:not([alt=''])`).length >= 3",
                arg=name,
                timeout=90_000,
            )
        found.page.evaluate("() => window.jupyterapp.shell.collapseLeft()")
        yield found


@pytest.fixture
def page(seen: Watched) -> Page:
    return seen.page


def until(page: Page, holds: Callable[[], bool], what: str) -> None:
    """Wait until something holds on the page."""
    for _ in range(round(PATIENCE_S / _PAUSE_S)):
        if holds():
            return
        page.wait_for_timeout(1e3 * _PAUSE_S)
    raise AssertionError(f"never came true: {what}")


def field(page: Page, panel: str, title: str) -> Locator:
    """A field or a choice of a panel, by the start of its name."""
    return page.locator(f".{panel} :is(input, select)[title^='{title}']").first


def until_holds(page: Page, panel: str, title: str, value: str) -> None:
    where = field(page, panel, title)
    until(page, lambda: where.input_value() == value, f"{panel}: {title} holds {value}")


def enter(where: Locator, text: str) -> None:
    where.fill(text)
    where.press("Enter")


def row_of(where: Locator) -> Locator:
    return where.locator("xpath=ancestor::div[contains(@class, 'hystkit-row')][1]")


def press(page: Page, where: Locator, key: str) -> None:
    """Press a key on the slider beside a field."""
    row_of(where).locator(".noUi-handle").focus()
    page.keyboard.press(key)


def pictures(page: Page, panel: str) -> list[str]:
    found: list[str] = page.eval_on_selector_all(
        f".{panel} img.hystkit-picture", "all => all.map(one => one.src)"
    )
    return found


def table(page: Page, panel: str) -> str:
    """The table of trips, and of what follows from them, as one line for each row."""
    rows = page.locator(f".{panel} .hystkit-table tr").all_inner_texts()
    return "\n".join(" ".join(row.split()) for row in rows)


def steady(page: Page, panel: str) -> tuple[list[str], str]:
    """Give pictures and table of a panel once neither has changed for a while."""
    before: tuple[list[str], str] = ([], "")
    while before != (now := (pictures(page, panel), table(page, panel))):
        before = now
        page.wait_for_timeout(300)
    return before


def until_told(page: Page, panel: str, text: str) -> None:
    until(page, lambda: text in table(page, panel), f"{panel} tells {text!r}")


def sideways(page: Page, panel: str, spared: str) -> list[str]:
    """What of a panel would have to be moved sideways to be read, without what is spared."""
    found: list[str] = page.evaluate(
        """([panel, spared]) => [...document.querySelectorAll(`.${panel}, .${panel} *`)]
          .filter(one => /auto|scroll/.test(getComputedStyle(one).overflowX)
            && one.scrollWidth > one.clientWidth + 1 && !(spared && one.closest(spared)))
          .map(one => one.className)""",
        [panel, spared],
    )
    return found


def outside(page: Page, panel: str) -> list[str]:
    """Cards, controls and buttons of a panel that stick out of it."""
    found: list[str] = page.evaluate(
        """panel => {
          const whole = document.querySelector("." + panel), room = whole.getBoundingClientRect();
          const parts = ":is(.hystkit-card, .hystkit-controls, .hystkit-candidate, button)";
          return [...whole.querySelectorAll(parts)].filter(one => {
            const box = one.getBoundingClientRect();
            return box.width && (box.left < room.left - 1 || box.right > room.right + 1);
          }).map(one => one.className);
        }""",
        panel,
    )
    return found


#: A panel, a slider of its own by its accessible name, and the step that follows its first value.
OWN_SLIDERS = [
    ("cycle", "rate of change with the load on", "2.2 mm/s"),
    ("noise", "rms of the noise", "56 mV"),
    ("width", "dead time [s]", "22 s"),
]


@pytest.mark.parametrize(("panel", "title", "after"), OWN_SLIDERS)
def test_keys_move_a_slider_of_its_own(page: Page, panel: str, title: str, after: str) -> None:
    before, told = steady(page, panel)
    where = field(page, panel, title)
    good = where.input_value()
    press(page, where, "ArrowRight")
    until_holds(page, panel, title, after)
    until(page, lambda: pictures(page, panel)[1] != before[1], "the figure follows")
    until(page, lambda: table(page, panel) != told, "the table follows")
    enter(where, good)
    until(page, lambda: table(page, panel) == told, "it is as it was")


@pytest.mark.parametrize("panel", PANELS)
def test_keys_move_a_part(page: Page, panel: str) -> None:
    before, _ = steady(page, panel)
    where = field(page, panel, "R_F,")
    press(page, where, "ArrowRight")
    moved = preferred.step(float(header_tank().parts["R_F"].value), "E96", 1)
    trips = hk.trip_points(header_tank().with_parts(R_F=moved))
    until_told(page, panel, show(float(trips.upper), "V"))
    until(page, lambda: pictures(page, panel)[1] != before[1], "the figure follows")
    press(page, where, "ArrowLeft")
    until_holds(page, panel, "R_F,", "100k")


def test_linked_panels_follow_each_other(page: Page) -> None:
    for one, other, text, written in (
        ("cycle", "noise", "110k", "110k"),
        ("noise", "cycle", "0.1M", "100k"),
    ):
        before, _ = steady(page, other)
        enter(field(page, one, "R_F,"), text)
        until(page, lambda p=other, b=before: pictures(page, p)[1] != b[1], "the other follows")
        until_holds(page, other, "R_F,", written)


@pytest.mark.parametrize(
    ("panel", "title", "text", "written"),
    [
        ("cycle", "rate of change with the load off", "-1500u", "-1.5 mm/s"),
        ("noise", "slope", "800m", "800 mV/s"),
        ("width", "rms of the noise", "8m", "8 mV"),
    ],
)
def test_engineering_notation_is_read(
    page: Page, panel: str, title: str, text: str, written: str
) -> None:
    _, told = steady(page, panel)
    where = field(page, panel, title)
    good = where.input_value()
    enter(where, text)
    until_holds(page, panel, title, written)
    until(page, lambda: table(page, panel) != told, "the table follows")
    enter(where, good)
    until(page, lambda: table(page, panel) == told, "it is as it was")


@pytest.mark.parametrize(
    ("panel", "title", "text", "said"),
    [
        ("cycle", "rate of change with the load off", "1 m/h/h", ""),
        ("noise", "second corner frequency", "", "no crossing rate"),
        ("noise", "rms of the noise", "50 furlongs", ""),
        ("width", "amplitude and frequency", "30 mV", "an amplitude and a frequency"),
        ("width", "largest swing", "-1", ""),
    ],
)
def test_a_wrong_entry_says_why_and_keeps_the_last_picture(
    page: Page, panel: str, title: str, text: str, said: str
) -> None:
    before = steady(page, panel)
    typed = field(page, panel, title)
    good = typed.input_value()
    enter(typed, text)
    refusal = row_of(typed).locator("[role=alert]")
    until(page, lambda: refusal.count() == 1, "it is refused")
    assert refusal.inner_text().strip()
    assert said in refusal.inner_text()
    assert typed.input_value() == text
    assert steady(page, panel) == before
    assert page.locator(f".{panel} .hystkit-error [role=alert]").count() == 0
    enter(typed, good)
    until(page, lambda: refusal.count() == 0, "the refusal goes")


@pytest.mark.parametrize(
    ("panel", "choice", "label", "wanted"),
    [
        ("cycle", "plant", "one lag", "time constant [s]"),
        ("noise", "noise", "brick wall", "highest frequency of the noise [Hz]"),
        ("width", "plant", "two lags", "sensor lag [s]"),
    ],
)
def test_another_kind_brings_its_own_numbers(
    page: Page, panel: str, choice: str, label: str, wanted: str
) -> None:
    before, told = steady(page, panel)
    chooser = page.locator(f".{panel} select[title='{choice}']")
    (kept,) = chooser.evaluate("one => [...one.selectedOptions].map(o => o.text)")
    assert field(page, panel, wanted).count() == 0
    chooser.select_option(label=label)
    until(page, lambda: field(page, panel, wanted).count() == 1, f"{wanted} is there")
    until(page, lambda: pictures(page, panel)[1] != before[1], "the figure follows")
    chooser.select_option(label=kept)
    until(page, lambda: table(page, panel) == told, "it is as it was")


def test_the_state_of_the_load_is_chosen_by_keys(page: Page) -> None:
    """With the load on at the output's other state the pump empties the tank further."""
    _, told = steady(page, "cycle")
    chooser = field(page, "cycle", "load is on at")
    chooser.focus()
    page.keyboard.press("ArrowDown")
    until_holds(page, "cycle", "load is on at", "output low")
    until(page, lambda: "starts per hour" not in table(page, "cycle"), "it does not cycle")
    page.keyboard.press("ArrowUp")
    until(page, lambda: table(page, "cycle") == told, "it is as it was")


def test_another_sample_changes_the_sample_only(page: Page) -> None:
    (_, figure, sample, *_), told = steady(page, "noise")
    page.locator(".noise button", has_text="another sample").click()
    until(page, lambda: pictures(page, "noise")[2] != sample, "another sample is drawn")
    (_, after, *_), told_after = steady(page, "noise")
    assert (after, told_after) == (figure, told)


def test_a_change_that_opens_the_window_is_found_and_taken(page: Page) -> None:
    card = page.locator(".width .hystkit-card", has_text="Width window").first
    card.locator("button", has_text="find changes").focus()
    page.keyboard.press("Enter")
    offers = card.locator(".hystkit-candidate")
    plant = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, dead_time=20)
    noise = hk.Noise.two_pole(rms="5m", f1=100, f2="10k")
    asked = {"plant": plant, "noise": noise, "starts_per_hour": 3, "swing": 0.3}
    expected = hk.width_window(header_tank(), **asked).openings
    until(page, lambda: offers.count() == len(expected), "the changes are listed")
    for number, opening in enumerate(expected):
        assert opening.text in " ".join(offers.nth(number).inner_text().split())
    before, _ = steady(page, "width")
    offers.first.locator("button", has_text="take").click()
    until(page, lambda: offers.count() == 0, "the offer is taken")
    card.locator("button", has_text="copy sizing").wait_for()
    until(page, lambda: pictures(page, "width")[1] != before[1], "the figure follows")
    assert "target width" in card.inner_text()


@pytest.mark.parametrize("width", [1400, 720, 400])
@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
def test_nothing_is_cut_off(page: Page, lab: Lab, theme: str, width: int) -> None:
    page.set_viewport_size({"width": width, "height": TALL})
    lab.command(page, "apputils:change-theme", theme=theme)
    for name in PANELS:
        steady(page, name)
        # Where there is less room than a picture needs at least, it moves within its own card.
        wide = WIDE if width < NARROW else ""
        assert sideways(page, name, wide) == [], name
        assert outside(page, name) == [], name
        cut = page.eval_on_selector_all(
            f".{name} :is(button, .hystkit-candidate .widget-html, .hystkit-row .widget-label,"
            " .hystkit-row .widget-html, .hystkit-field input):not([title='name of the device'])",
            "all => all.filter(o => o.offsetParent && (o.scrollWidth > o.clientWidth + 1"
            " || o.scrollHeight > o.clientHeight + 2))"
            ".map(o => `${o.title} ${o.value || o.innerText}`)",
        )
        assert cut == [], name


@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
def test_the_accessibility_checker_finds_nothing(
    page: Page, lab: Lab, theme: str, axe: str
) -> None:
    page.set_viewport_size({"width": 1400, "height": TALL})
    lab.command(page, "apputils:change-theme", theme=theme)
    steady(page, "width")
    page.evaluate(axe)
    for name in PANELS:
        found = page.evaluate(f"axe.run('.{name}', {{ resultTypes: ['violations'] }})")
        assert [(each["id"], each["nodes"][0]["html"]) for each in found["violations"]] == [], name


def test_nothing_went_wrong_and_nothing_was_fetched_from_outside(seen: Watched) -> None:
    assert seen.requests == []
    assert [line for line in seen.complaints if line.lower().startswith("error")] == []
    assert [line for line in seen.complaints if "hystkit" in line] == []
