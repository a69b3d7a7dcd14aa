"""The live page in a real browser: same numbers and pictures as Python, moved by hand."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.export.page.document import Page as Draft
from hystkit.export.page.loop import draw_loop
from hystkit.export.page.ruler import draw_ruler
from hystkit.export.page.writer import standalone
from hystkit.numeric.extremes import not_evaluated
from tests.browser.pages import (
    PLAIN,
    Watched,
    cell,
    deviation,
    entry,
    settings,
    slider,
    states,
    type_in,
    until,
    watched,
)
from tests.circuit.custom import uncertain_chain
from tests.export.designs import every_design, full, ladder, stuck

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

pytestmark = pytest.mark.browser

AGREE = 1e-12
NUMBERS = ("v_ee", "v_cc", "upper", "lower", "width", "middle", "output_high", "output_low",
           "reference")  # fmt: skip
INTERVALS = ("upper_interval", "lower_interval", "common_mode", "signal_span", "pins")
EVALUATE = f"""(all) => JSON.stringify(all.map(
    (state) => document.querySelector('.hk-live').hystkit.evaluate(state)), {PLAIN})"""
FORMS = {stage.title: full(stage) for stage in hk.Stage.all()} | {"own circuit": ladder()}


# -- the same numbers and pictures as Python -------------------------------------------------


@pytest.mark.parametrize("title", FORMS)
def test_page_and_python_agree(blank: Watched, title: str) -> None:
    designs = settings(FORMS[title], 50, seed=len(title))
    blank.page.set_content(hk.page_fragment(FORMS[title]))
    found = json.loads(blank.page.evaluate(EVALUATE, states(designs)))
    switching = 0
    for design, page in zip(designs, found, strict=True):
        expected = hk.levels(design)
        switching += expected.ok
        assert (page["ok"], page["message"]) == (expected.ok, expected.message)
        for name in NUMBERS:
            assert deviation(page[name], getattr(expected, name)) <= AGREE, (name, design)
        for name in INTERVALS:
            pair = getattr(expected, name)
            for end, wanted in zip(page[name] or (None,), pair or (None,), strict=True):
                assert deviation(end, wanted) <= AGREE, (name, design)
    assert switching >= 10
    blank.all_quiet()


@pytest.mark.parametrize("name", every_design())
def test_script_draws_what_python_baked(blank: Watched, name: str) -> None:
    design = every_design()[name]
    blank.page.set_content(hk.page_fragment(design))
    for ruler, loop in ((344, 344), (620, 460), (1100, 700)):
        drawn = blank.page.evaluate(
            """([ruler, loop]) => document.querySelector('.hk-live').hystkit
                .pictures(ruler, loop).map((pen) => pen.marks)""",
            [ruler, loop],
        )
        baked = [draw_ruler(hk.levels(design), ruler), draw_loop(hk.loop(design), loop)]
        for script, pen in zip(drawn, baked, strict=True):
            assert [(m[0], m[1], m[3]) for m in script] == [
                (kind, look, list(texts)) for kind, look, _, texts in pen.marks
            ]
            for mark, (_, _, places, _) in zip(script, pen.marks, strict=True):
                assert mark[2] == pytest.approx(places, abs=0.021)


def test_texts_stay_when_the_script_takes_over(chromium: Browser) -> None:
    designs = {name: d for name, d in every_design().items() if name.endswith("full")}
    shown: list[dict[str, list[str]]] = []
    for scripts in (False, True):
        with watched(chromium, java_script_enabled=scripts) as seen:
            shown.append({})
            designs |= {"stuck": stuck(), "tank": header_tank(), "chain": uncertain_chain(17)}
            for name, design in designs.items():
                seen.page.goto("about:blank")  # else the policy of the page before holds
                seen.page.set_content(standalone(Draft(design)))
                shown[-1][name] = _texts(seen.page)
            seen.all_quiet()
    assert shown[0] == shown[1]
    assert len(shown[0]["tank"]) > 20
    assert not_evaluated(designs["chain"]) in shown[1]["chain"]


def _texts(page: Page) -> list[str]:
    kinds = ("[data-cell]", "[data-symbol]", ".hk-impossible", ".hk-schematic [data-value]")
    found = [text for kind in kinds for text in page.locator(kind).all_text_contents()]
    pictures = [page.locator(f"{look} svg").first for look in (".hk-ruler", ".hk-loop")]
    return [*found, *(picture.get_attribute("aria-label") or "" for picture in pictures)]


def test_numbers_are_read_as_in_python(tank: Watched) -> None:
    from hystkit.base.quantity import QuantityError, parse_percent, read

    texts = [
        "4k7", "4.7k", "4.7 kΩ", "4.7kohm", "1R5", "R47", "33k", "1M", "1m", "2.2e3", "0", "-15",
        " 10 k ", "4K7", "4,7k", "1.000,0", "1 000", "\uff14k7", "", "nan", "inf", "4k7k", "10kF",
        "1e400", "1e-400", "0x10", "1_000", "constructor", "__proto__", "k", "4.7 k Ω", "1µ", "1u",
        "100n", "12 V", "3V3", "1.5 kV", "20 mA", "−5", "+5", "5.", ".5", "1e3k", "4R7Ω",
        "2.5e-1 V",
    ]  # fmt: skip
    script = "(t, u) => document.querySelector('.hk-live').hystkit.read(t, u)"
    for unit in ("Ω", "V", "A"):
        for text in texts:
            found = tank.page.evaluate(f"([t, u]) => ({script})(t, u)", [text, unit])
            try:
                expected: float | None = read(text, unit=unit)
            except QuantityError:
                expected = None
            assert (None if found != found else found) == expected, (text, unit)
    for text in ("1", "1 %", "±5%", "F", "J", "100 ppm", "0.5", "5.", "x", "-1", "1,5"):
        found = tank.page.evaluate(
            "(t) => document.querySelector('.hk-live').hystkit.readTolerance(t)", text
        )
        try:
            expected = parse_percent(text, bare=True)
        except QuantityError:
            expected = None
        assert (None if found != found else found) == expected, text


def test_numbers_are_written_as_in_python(tank: Watched) -> None:
    from hystkit.base.quantity import code, show

    values = [10.0**k * m for k in range(-12, 12) for m in (1, 1.2345, 9.9995, 1.00005, 4.7, 2.5)]
    values += [0.0, 1234.5, 1235.5, 0.5, 0.125, 999.95, 99995.0, 3.3, 1e15]
    script = """(all) => all.map((v) => { const h = document.querySelector('.hk-live').hystkit;
        return [h.show(v, 'V'), h.show(-v, 'A'), h.show(v, '%'), h.code(v)]; })"""
    for value, found in zip(values, tank.page.evaluate(script, values), strict=True):
        assert found == [show(value, "V"), show(-value, "A"), show(value, "%"), code(value)]


# -- controls --------------------------------------------------------------------------------


def test_keys_move_a_slider_and_everything_follows(tank: Watched) -> None:
    page = tank.page
    ruler, loop = ".hk-ruler svg", ".hk-loop svg"
    before = [page.locator(s).inner_html() for s in (ruler, loop)], cell(page, "upper.volts")
    slider(page, "R_F").focus()
    page.keyboard.press("ArrowRight")
    assert entry(page, "R_F").input_value() == "102k"
    expected = hk.trip_points(header_tank(), R_F="102k")
    assert cell(page, "upper.volts") == f"{expected.upper:.3f} V"
    assert [page.locator(s).inner_html() for s in (ruler, loop)] != before[0]
    assert page.locator("[data-value='R_F']").text_content() == "102k"
    assert slider(page, "R_F").get_attribute("aria-valuetext") == "102 kΩ"
    page.keyboard.press("End")
    assert entry(page, "R_F").input_value() == "1M"
    page.keyboard.press("Home")
    assert entry(page, "R_F").input_value() == "10k"
    page.keyboard.press("PageUp")
    assert entry(page, "R_F").input_value() not in ("10k", "10k2")
    tank.all_quiet()


def test_dragging_a_slider_redraws_on_the_way(tank: Watched) -> None:
    page = tank.page
    box = slider(page, "R_T").bounding_box()
    assert box is not None
    y, seen = box["y"] + box["height"] / 2, set()
    page.mouse.move(box["x"] + box["width"] / 2, y)
    page.mouse.down()
    for step in range(6):
        page.mouse.move(box["x"] + box["width"] * (0.5 + 0.07 * step), y)
        seen.add(cell(page, "middle.volts"))
    page.mouse.up()
    assert len(seen) >= 5


def test_typed_values_are_taken(tank: Watched) -> None:
    page = tank.page
    type_in(page, "R_T", "33 kΩ")
    type_in(page, "R_F", "4M7")
    type_in(page, "V_CC", "4.8")
    type_in(page, "R_B", "5", "hk-tolerance")
    design = header_tank().with_parts(R_T=hk.Part(33e3, 0.01), R_B=hk.Part(26.7e3, 0.05),
                                      R_F=hk.Part(4.7e6, 0.01)).with_supply(v_cc=4.8)  # fmt: skip
    found = json.loads(
        page.evaluate(
            f"() => JSON.stringify(document.querySelector('.hk-live').hystkit.evaluate(), {PLAIN})"
        )
    )
    expected = hk.levels(design)
    for name in NUMBERS:
        assert deviation(found[name], getattr(expected, name)) <= AGREE, name
    assert found["upper_interval"] == pytest.approx(expected.upper_interval, rel=AGREE)
    assert entry(page, "R_T").input_value() == "33k"
    assert entry(page, "R_F").input_value() == "4M7"


def test_a_value_off_the_series_steps_to_the_next_preferred_one(tank: Watched) -> None:
    page = tank.page
    for key, lands in (("ArrowLeft", "49k9"), ("ArrowRight", "51k1")):
        type_in(page, "R_T", "50k2")
        assert entry(page, "R_T").input_value() == "50k2"
        slider(page, "R_T").press(key)
        assert entry(page, "R_T").input_value() == lands
    page.locator(".hk-series").select_option("E12")
    slider(page, "R_T").press("ArrowRight")
    assert entry(page, "R_T").input_value() == "56k"


def test_a_level_follows_until_it_is_given(tank: Watched) -> None:
    page = tank.page
    high = entry(page, "V_OH")
    assert (high.input_value(), high.get_attribute("placeholder")) == ("", "5 V")
    type_in(page, "V_CC", "4")
    assert high.get_attribute("placeholder") == "4 V"
    type_in(page, "V_OH", "3V3")
    assert page.locator("[data-symbol='V_OH'] td").first.inner_text() == "3.3 V"
    page.locator(".hk-row[data-name='V_OH'] [data-do=auto]").click()
    assert (high.input_value(), high.get_attribute("placeholder")) == ("", "4 V")
    assert page.locator("[data-symbol='V_OH'] td").first.inner_text() == "4 V"


@pytest.mark.parametrize(
    ("name", "text", "says"),
    [
        ("R_T", "4,7k", "4.7k"),
        ("R_T", "-1k", "above zero"),
        ("R_T", "0", "above zero"),
        ("R_T", "abc", "4k7"),
        ("R_T", "", "empty"),
        ("V_CC", "5 A", "2.5 V"),
        ("R_T", "1e999", "4k7"),
    ],
)
def test_what_cannot_be_used_is_refused_in_place(
    tank: Watched, name: str, text: str, says: str
) -> None:
    page = tank.page
    before = page.locator(".hk-ruler").inner_html()
    type_in(page, name, text)
    fault = page.locator(f".hk-row[data-name='{name}'] .hk-fault")
    assert says in fault.inner_text()
    field = entry(page, name)
    assert field.get_attribute("aria-invalid") == "true"
    assert field.get_attribute("aria-describedby") == fault.get_attribute("id")
    assert field.input_value() == text
    assert page.locator(".hk-ruler").inner_html() == before
    field.press("Escape")
    assert fault.is_hidden()
    assert field.input_value() in ("46k4", "5 V")
    tank.all_quiet()


def test_impossible_settings_say_so_and_recover(tank: Watched) -> None:
    page = tank.page
    type_in(page, "V_OH", "0")
    assert "high output level" in page.locator(".hk-impossible").inner_text()
    assert cell(page, "upper.volts") == "—"
    assert cell(page, "upper.measurand").startswith("—")
    assert "high output level" in page.locator(".hk-ruler").inner_text()
    type_in(page, "V_OH", "5")
    assert page.locator(".hk-impossible").is_hidden()
    assert cell(page, "upper.volts") == "2.286 V"
    tank.all_quiet()


def test_law_says_what_it_leaves_out(tank: Watched) -> None:
    page = tank.page
    note = page.locator(".hk-left-out")
    assert note.is_hidden()
    page.locator(".hk-device summary").click()
    type_in(page, "offset", "2m")
    assert "V_OS" in note.inner_text()
    type_in(page, "offset", "0")
    assert note.is_hidden()


def test_trips_are_said_aloud_a_little_later(tank: Watched) -> None:
    page = tank.page
    slider(page, "R_F").press("ArrowRight")
    until(page, "document.querySelector('.hk-aloud').textContent.includes('width')")
    aloud = page.locator(".hk-aloud")
    assert aloud.get_attribute("aria-live") == "polite"
    assert aloud.inner_text().startswith("lower trip 1.")
