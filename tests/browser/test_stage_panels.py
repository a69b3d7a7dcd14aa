"""The panels for sizing, spread and findings in a real JupyterLab: typed, pressed and by keys."""

from __future__ import annotations

import html
import re
from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import pytest

import hystkit as hk
from hystkit.base.quantity import code
from hystkit.circuit.demo import header_tank
from hystkit.panels.sizing import LISTED
from tests.browser.lab import Lab, jupyterlab
from tests.browser.pages import Watched, watched

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator, Page

pytestmark = pytest.mark.browser

CELLS = [
    "import traitlets\nimport hystkit as hk\nfrom hystkit.circuit.demo import header_tank\n"
    "tank = header_tank()\nloop = hk.signals.CurrentLoop(150, span=(0, 2), unit='m', name='level')",
    "sizing = hk.panels.SizingPanel(tank, series='E24').add_class('sizing')\nsizing",
    "trip = hk.panels.TripPanel(tank).add_class('trip')\n"
    "link = traitlets.link((sizing, 'design'), (trip, 'design'))\ntrip",
    "hk.panels.SpreadPanel(tank).add_class('spread')",
    "hk.panels.FindingsPanel(tank.with_signal(loop)).add_class('findings')",
]
PANELS = ("sizing", "trip", "spread", "findings")
WANTED: dict[str, Any] = {"on_at": (0.75, 0.85), "off_at": (1.36, 1.46)}
PATIENCE = 30_000


@pytest.fixture(scope="module")
def lab(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    pytest.importorskip("jupyterlab", reason="JupyterLab is not installed")
    with jupyterlab(tmp_path_factory.mktemp("lab"), CELLS) as running:
        yield running


@pytest.fixture(scope="module")
def seen(lab: Lab, chromium: Browser) -> Iterator[Watched]:
    size = {"width": 1400, "height": 5200}
    with watched(chromium, own=lab.url, viewport=size) as found:
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


def field(page: Page, panel: str, title: str) -> Locator:
    """A field or a choice of a panel, by the start of its name."""
    return page.locator(f".{panel} :is(input, select)[title^='{title}']")


def holds(page: Page, panel: str, title: str, value: str) -> None:
    """Wait until a field or a choice of a panel holds a value."""
    page.wait_for_function(
        "([panel, title, value]) => [...document.querySelectorAll("
        "`.${panel} :is(input, select)[title^='${title}']`)].some(one => one.value === value)",
        arg=[panel, title, value],
        timeout=PATIENCE,
    )


def enter(where: Locator, text: str) -> None:
    where.fill(text)
    where.press("Enter")


def shown(page: Page, panel: str, text: str, within: str = "") -> Locator:
    """Wait until a panel shows a text, and give the place."""
    place = page.locator(f".{panel} {within}".rstrip(), has_text=text).first
    place.wait_for(timeout=PATIENCE)
    return place


def refusal(typed: Locator) -> Locator:
    """The refusal under a field."""
    row = typed.locator("xpath=ancestor::div[contains(@class, 'hystkit-row')][1]")
    return row.locator("[role=alert]")


def pictures(page: Page, panel: str) -> list[str]:
    found: list[str] = page.eval_on_selector_all(
        f".{panel} img.hystkit-picture", "all => all.map(one => one.src)"
    )
    return found


def steady(page: Page, panel: str) -> list[str]:
    """Give the pictures of a panel once none has changed for a while."""
    before: list[str] = []
    while before != (now := pictures(page, panel)):
        before = now
        page.wait_for_timeout(600)
    return before


def candidates(page: Page) -> Locator:
    return page.locator(".sizing .hystkit-candidate")


def words(markup: str) -> str:
    return " ".join(html.unescape(re.sub(r"<[^>]*>", " ", markup)).split())


def test_a_window_is_typed_and_a_candidate_adopted(page: Page) -> None:
    for name, text, written in (("on at,", "0.75 to 0.85", "750 mm to 850 mm"),
                                ("off at,", "1.36m to 1.46", "1.36 m to 1.46 m")):  # fmt: skip
        enter(field(page, "sizing", name), text)
        holds(page, "sizing", name, written)
    page.locator(".sizing button", has_text="search").click()
    shown(page, "sizing", "combinations searched", ".hystkit-card")
    # The rows are rendered after the line above them.
    candidates(page).nth(LISTED - 1).wait_for(timeout=PATIENCE)
    tank = header_tank()
    found = hk.size(tank.stage, supply=tank.supply, device=tank.device, signal=tank.signal,
                    series="E24", count=LISTED, **WANTED)  # fmt: skip
    assert candidates(page).count() == LISTED
    for number, one in enumerate(found):
        text = " ".join(candidates(page).nth(number).inner_text().split())
        assert one.values in text
        assert one.verdict in text
    before = pictures(page, "trip")
    candidates(page).nth(1).locator("button").click()
    shown(page, "sizing", "✓ adopted", ".hystkit-candidate button")
    for panel in ("sizing", "trip"):
        for name, part in found[1].design.parts.items():
            holds(page, panel, f"{name},", code(part.value, 6))
    now = steady(page, "trip")
    assert all(one != other for one, other in zip(before, now, strict=True))
    told = page.locator(".trip img.hystkit-picture").first.get_attribute("alt")
    assert f"{float(found[1].trips.upper):.4g}" in str(told)


def test_keys_search_and_adopt(page: Page) -> None:
    series = field(page, "sizing", "series")
    series.focus()
    page.keyboard.press("ArrowUp")
    holds(page, "sizing", "series", "E12")
    search = page.locator(".sizing button", has_text="search")
    search.focus()
    page.keyboard.press("Enter")
    tank = header_tank()
    found = hk.size(tank.stage, supply=tank.supply, device=tank.device, signal=tank.signal,
                    series="E12", count=1, **WANTED)  # fmt: skip
    shown(page, "sizing", found[0].values, ".hystkit-candidate")
    candidates(page).first.locator("button").focus()
    page.keyboard.press("Space")
    shown(page, "sizing", "✓ adopted", ".hystkit-candidate button")
    holds(page, "trip", "R_F,", code(found[0].design.parts["R_F"].value, 6))


@pytest.mark.parametrize(
    ("panel", "title", "text", "said"),
    [
        ("sizing", "on at,", "from 0.75", "both ends"),
        ("sizing", "tolerance of the free", "33,2", ""),
        ("spread", "window of the upper", "2.35 to 2.25", "wrong way round"),
        ("spread", "number of samples", "many", ""),
        ("findings", "R_F,", "-4k7", "positive"),
    ],
)
def test_a_wrong_entry_says_why_and_keeps_the_last_picture(
    page: Page, panel: str, title: str, text: str, said: str
) -> None:
    before = steady(page, panel)
    typed = field(page, panel, title).last
    good = typed.input_value()
    enter(typed, text)
    refusal(typed).wait_for(timeout=PATIENCE)
    assert said in refusal(typed).inner_text()
    assert typed.input_value() == text
    assert steady(page, panel) == before
    assert page.locator(f".{panel} .hystkit-error [role=alert]").count() == 0
    enter(typed, good)
    refusal(typed).wait_for(state="detached", timeout=PATIENCE)


def test_windows_change_the_yield(page: Page) -> None:
    yields = []
    for upper, lower in (((2.25, 2.35), (1.52, 1.62)), ((2.28, 2.30), (1.56, 1.58))):
        before = steady(page, "spread")
        for trip, (low, high) in (("upper", upper), ("lower", lower)):
            enter(field(page, "spread", f"window of the {trip}"), f"{low} to {high}")
        expected = hk.panels.SpreadPanel(header_tank(), upper=upper, lower=lower)
        try:
            (row,) = [row for row in expected.trips.rows if row[0] == "yield"]
        finally:
            expected.close()
        shown(page, "spread", row[1], ".hystkit-table tr")
        assert steady(page, "spread")[1] != before[1]
        yields.append(float(row[1].removeprefix("> ").removesuffix(" %")))
    assert yields[0] > yields[1]


def test_what_is_declared_about_the_load_changes_the_findings(page: Page) -> None:
    loop = hk.signals.CurrentLoop(150, span=(0, 2), unit="m", name="level")
    design = header_tank().with_signal(loop)
    told: dict[str, str] = {}
    for title, choice, name, value in (
        ("safe state", "on", "safe", "on"),
        ("load is on at", "output low", "load", "low"),
        ("starts with", "output high", "start", "high"),
    ):
        field(page, "findings", title).select_option(label=choice)
        told[name] = value
        found = hk.review(design, **told)
        for finding in (found["sensor open"], found["start-up"]):
            row = shown(page, "findings", finding.text, ".hystkit-wrapped tr")
            assert row.get_attribute("class") == f"hystkit-{finding.severity}-line"
            assert finding.severity in words(row.inner_html())


def test_keys_choose_a_state(page: Page) -> None:
    safe = field(page, "findings", "safe state")
    safe.select_option(label="not declared")
    shown(page, "findings", "no safe state declared", ".hystkit-wrapped tr")
    safe.focus()
    page.keyboard.press("ArrowDown")
    page.keyboard.press("ArrowDown")
    shown(page, "findings", "safe is off", ".hystkit-wrapped tr")


def test_a_class_of_devices_fills_the_section_and_marks_it(page: Page) -> None:
    name = "rail-to-rail push-pull comparator class"
    fold = page.locator(".findings .hystkit-fold", has_text="Device")
    fold.focus()
    page.keyboard.press("Enter")
    page.locator(".findings .hystkit-fold[aria-expanded=true]", has_text="Device").wait_for()
    field(page, "findings", "class of the device").select_option(label=name)
    shown(page, "findings", f"typical of the {name}", ".hystkit-wrapped tr")
    device = hk.device_classes[name].device
    rows = page.locator(".findings .hystkit-row", has_text=" typical")
    assert rows.count() == len(device.typical)
    enter(field(page, "findings", "delay"), "4 µs")
    holds(page, "findings", "class of the device", "own values")
    assert rows.count() == len(device.typical) - 1
    shown(page, "findings", "typical values, to be replaced", ".hystkit-summary")


@pytest.mark.parametrize("width", [1400, 720, 400])
@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
def test_nothing_is_cut_off(page: Page, lab: Lab, theme: str, width: int) -> None:
    page.set_viewport_size({"width": width, "height": 5200})
    lab.command(page, "apputils:change-theme", theme=theme)
    page.wait_for_timeout(1500)
    for name in PANELS:
        panel = page.locator(f".{name}").bounding_box()
        assert panel is not None
        for part in (".hystkit-card", ".hystkit-controls", ".hystkit-candidate", "button"):
            boxes = [one.bounding_box() for one in page.locator(f".{name} {part}").all()]
            for box in boxes:
                if box is not None and box["width"] > 0:
                    assert box["x"] >= panel["x"] - 1, (name, part)
                    assert box["x"] + box["width"] <= panel["x"] + panel["width"] + 1, (name, part)
        cut = page.eval_on_selector_all(
            f".{name} :is(button, .hystkit-candidate .widget-html, .hystkit-field input)"
            ":not([title='name of the device'])",
            "all => all.filter(o => o.offsetParent && (o.scrollWidth > o.clientWidth + 1"
            " || o.scrollHeight > o.clientHeight + 2)).map(o => o.className + o.innerText)",
        )
        assert cut == [], name


@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
def test_the_accessibility_checker_finds_nothing(
    page: Page, lab: Lab, theme: str, axe: str
) -> None:
    page.set_viewport_size({"width": 1400, "height": 5200})
    lab.command(page, "apputils:change-theme", theme=theme)
    page.wait_for_timeout(1500)
    page.evaluate(axe)
    for name in PANELS:
        found = page.evaluate(f"axe.run('.{name}', {{ resultTypes: ['violations'] }})")
        assert [(each["id"], each["nodes"][0]["html"]) for each in found["violations"]] == [], name


def test_nothing_was_fetched_from_outside(seen: Watched) -> None:
    assert seen.requests == []
    assert [line for line in seen.complaints if line.startswith("Error") or "hystkit" in line] == []
