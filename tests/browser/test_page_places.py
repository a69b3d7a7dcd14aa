"""The live page wherever it is put: alone, served, framed, pasted, without scripts."""

from __future__ import annotations

import html
import http.server
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.export.page.document import Page as Draft
from hystkit.export.page.writer import page_frame, standalone
from tests.browser.pages import (
    Watched,
    cell,
    entry,
    slider,
    until,
    watched,
)
from tests.export.designs import AWKWARD, full

if TYPE_CHECKING:
    from playwright.sync_api import Browser

pytestmark = pytest.mark.browser


def test_page_asks_for_nothing_and_says_nothing(tank: Watched) -> None:
    tank.page.wait_for_timeout(700)
    tank.all_quiet()
    assert tank.page.evaluate("performance.getEntriesByType('resource').length") == 0


def test_policy_lets_in_its_own_script_and_no_other(tank: Watched) -> None:
    page = tank.page
    page.evaluate(
        """() => { const s = document.createElement('script');
        s.textContent = 'window.intruder = 1'; document.body.append(s); }"""
    )
    assert page.evaluate("window.intruder") is None
    assert any("Content Security Policy" in said for said in tank.complaints)


@pytest.mark.parametrize("separate", [False, True])
def test_strict_policy_of_a_server(chromium: Browser, tmp_path: Path, separate: bool) -> None:
    written = hk.write_page(full(hk.Stage.all()[3]), tmp_path / "a b&c.html",
                            separate_script=separate)  # fmt: skip
    with _served(tmp_path, written.policy) as root, watched(chromium, own=root) as seen:
        seen.page.goto(f"{root}/a%20b%26c.html")
        slider(seen.page, "R_F").press("ArrowRight")
        assert seen.page.evaluate("!!document.querySelector('.hk-live').hystkit")
        assert seen.page.locator(".hk-ruler svg").count() == 1
        seen.all_quiet()


def test_separate_files_work_from_disk(chromium: Browser, tmp_path: Path) -> None:
    written = hk.write_page(header_tank(), tmp_path / "tank.html", separate_script=True)
    with watched(chromium, own="file://") as seen:
        seen.page.goto(written.path.as_uri())
        slider(seen.page, "R_F").press("ArrowRight")
        assert entry(seen.page, "R_F").input_value() == "102k"
        seen.all_quiet()


@contextmanager
def _served(folder: Path, policy: str) -> Iterator[str]:
    """Serve a folder on loopback with a content-security policy in the header."""

    class Handler(http.server.SimpleHTTPRequestHandler):
        def end_headers(self) -> None:
            self.send_header("Content-Security-Policy", policy)
            super().end_headers()

        def log_message(self, *_: Any) -> None:
            pass

    answer = partial(Handler, directory=str(folder))
    server = http.server.ThreadingHTTPServer(("127.0.0.1", 0), answer)
    threading.Thread(target=server.serve_forever, daemon=True).start()
    try:
        yield f"http://127.0.0.1:{server.server_port}"
    finally:
        server.shutdown()
        server.server_close()


@pytest.mark.parametrize("way", ["file in a frame", "srcdoc"])
def test_runs_in_a_sandboxed_frame(chromium: Browser, tmp_path: Path, way: str) -> None:
    written = hk.write_page(header_tank(), tmp_path / "tank.html")
    frame = (
        f'<iframe sandbox="allow-scripts" width="900" height="900" src="{written.path.as_uri()}">'
        "</iframe>"
        if way == "file in a frame"
        else page_frame(header_tank(), height_px=900)
    )
    host = tmp_path / "host.html"
    host.write_text(f"<!DOCTYPE html><title>wiki</title><body>{frame}</body>", encoding="utf-8")
    with watched(chromium, own="file://") as seen:
        seen.page.goto(host.as_uri())
        inner = seen.page.frame_locator("iframe")
        knob = inner.locator(".hk-row[data-name='R_F'] input[type=range]")
        knob.press("ArrowRight")
        assert inner.locator(".hk-row[data-name='R_F'] .hk-value").input_value() == "102k"
        inner.locator("[data-do=latex]").click()
        clip = inner.locator(".hk-said")
        clip.filter(has_text="cop").wait_for()
        assert inner.locator("[data-do=link]").is_visible() is (way != "srcdoc")
        seen.page.wait_for_timeout(600)
        seen.all_quiet()


@pytest.mark.parametrize("width", [1280, 360])
def test_without_scripts_the_first_picture_and_the_tables_stand(
    chromium: Browser, tmp_path: Path, width: int
) -> None:
    written = hk.write_page(header_tank(), tmp_path / "tank.html")
    viewport = {"width": width, "height": 900}
    with watched(chromium, own="file://", java_script_enabled=False, viewport=viewport) as seen:
        page = seen.page
        page.goto(written.path.as_uri())
        shown = [e for e in page.locator(".hk-ruler svg").all() if e.is_visible()]
        assert len(shown) == 1
        assert "upper 2.286 V" in (shown[0].text_content() or "")
        assert page.locator(".hk-schematic").is_visible()
        assert cell(page, "upper.volts") == "2.286 V"
        assert cell(page, "upper.measurand") == "1.405 m"
        assert page.locator("[data-symbol=R_T] td").first.inner_text() == "46.4 kΩ"
        assert page.locator(".hk-equation").first.is_visible()
        assert page.locator(".hk-controls").is_hidden()
        assert page.locator("button:visible").count() == 0
        seen.all_quiet()


def test_fragments_on_one_page_keep_apart(chromium: Browser, tmp_path: Path) -> None:
    first, second = header_tank(), full(hk.Stage.all()[13])
    pasted = [hk.page_fragment(design) for design in (first, second, first)]
    rules = "table{width:1px} .upper{display:none} input{width:3px} h2{color:red}"
    host = tmp_path / "host.html"
    host.write_text(
        f"<!DOCTYPE html><meta charset=utf-8><style>{rules}</style><h1 class=upper>wiki</h1>"
        + "<hr>".join(pasted),
        encoding="utf-8",
    )
    with watched(chromium, own="file://") as seen:
        page = seen.page
        page.goto(host.as_uri())
        roots = page.locator(".hk-live")
        assert roots.count() == 3
        ids = page.evaluate("[...document.querySelectorAll('[id]')].map((e) => e.id)")
        assert len(ids) == len(set(ids))
        texts = [roots.nth(k).locator(".hk-ruler").inner_html() for k in range(3)]
        knob = roots.nth(2).locator("[data-name=R_F] input[type=range]")
        knob.press("ArrowRight")
        after = [roots.nth(k).locator(".hk-ruler").inner_html() for k in range(3)]
        assert [a == b for a, b in zip(texts, after, strict=True)] == [True, True, False]
        until(page, "location.hash.includes('R_F=102k')")
        again = page.url
        with watched(chromium, own="file://") as other:
            other.page.goto(again)
            values = other.page.locator("[data-name=R_F] .hk-value")
            assert [values.nth(k).input_value() for k in range(3)] == ["100k", "909k", "102k"]
        seen.all_quiet()


def test_anchor_of_the_page_around_is_kept(chromium: Browser, tmp_path: Path) -> None:
    host = tmp_path / "host.html"
    host.write_text(
        f"<!DOCTYPE html><meta charset=utf-8>{hk.page_fragment(header_tank())}", encoding="utf-8"
    )
    with watched(chromium, own="file://") as seen:
        seen.page.goto(host.as_uri() + "#chapter-2")
        slider(seen.page, "R_F").press("ArrowRight")
        seen.page.wait_for_timeout(600)
        assert seen.page.url.endswith("#chapter-2")


@pytest.mark.parametrize(
    ("scheme", "around", "theme"),
    [("light", "", "light"), ("dark", "", "dark"), ("light", "background:#111;color:#eee", "dark"),
     ("dark", "background:#fff;color:#222", "light")],
)  # fmt: skip
def test_fragment_follows_the_colours_around_it(
    chromium: Browser, scheme: str, around: str, theme: str
) -> None:
    base = "" if around else ":root{color-scheme:light dark}"
    with watched(chromium, color_scheme=scheme) as seen:
        seen.page.set_content(
            f"<!DOCTYPE html><style>{base}</style><body style='{around}'>"
            + hk.page_fragment(header_tank())
        )
        assert seen.page.locator(".hk-live").get_attribute("data-theme") == theme
        colour = seen.page.evaluate(
            "getComputedStyle(document.querySelector('.hk-card')).backgroundColor"
        )
        assert colour == ("rgb(255, 255, 255)" if theme == "light" else "rgb(20, 24, 29)")


def test_user_text_stays_text(chromium: Browser) -> None:
    attack = '</script><img src=x onerror="window.hit=1"><b>"\'&'
    design = hk.Design(
        header_tank().stage,
        header_tank().parts,
        supply=5.0,
        device=hk.Device(name=attack),
        signal=hk.signals.Linear(1.2, 0.6, span=(0, 2), unit=f"{attack}m", name=attack),
        name=attack,
    )
    host = html.escape(standalone(Draft(design)))
    with watched(chromium) as seen:
        seen.page.set_content(f'<iframe srcdoc="{host}" width="900"></iframe>')
        inner = seen.page.frame_locator("iframe")
        inner.locator("[data-name='R_F'] input[type=range]").press("ArrowRight")
        assert inner.locator("h1").inner_text() == attack
        assert inner.locator("img").count() == 0
        seen.all_quiet()
    for live in (True, False):
        with watched(chromium) as seen:
            seen.page.set_content(hk.page_fragment(design, live=live))
            assert seen.page.evaluate("window.hit") is None
            assert seen.page.locator("h2").first.inner_text() == attack
            seen.all_quiet()


def test_awkward_name_is_shown_as_it_is(blank: Watched) -> None:
    blank.page.set_content(hk.page_fragment(full(hk.Stage.all()[0])))
    shown = blank.page.locator("h2").first.text_content() or ""
    assert shown == AWKWARD


def test_static_fragment_reads_without_style_or_script(chromium: Browser) -> None:
    with watched(chromium, java_script_enabled=False) as seen:
        seen.page.set_content(hk.page_fragment(header_tank(), live=False))
        for picture in seen.page.locator("img").all():
            assert len(picture.get_attribute("alt") or "") > 40
            assert picture.evaluate("(e) => e.naturalWidth") > 400
        assert seen.page.locator("table").count() == 2
        seen.all_quiet()
