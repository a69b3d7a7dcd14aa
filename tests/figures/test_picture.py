"""Kept pictures: fast because nothing is drawn twice, and never different from a new one."""

from __future__ import annotations

import gc
import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import matplotlib as mpl
import numpy as np
import pytest
from matplotlib.artist import Artist
from matplotlib.figure import Figure

from hystkit.base.errors import InputError, OutputExistsError
from hystkit.figures import (
    LoopPicture,
    Picture,
    RulerPicture,
    TimelinePicture,
    loop,
    ruler,
    timeline,
)
from hystkit.figures.png import encode
from hystkit.numeric.views import Levels
from tests.figures.samples import failed, levels, loop_of, response_of, vent
from tests.figures.seen import pixels

MAKERS = {
    "ruler": (RulerPicture, lambda found: found),
    "loop": (LoopPicture, loop_of),
    "timeline": (TimelinePicture, response_of),
}
KINDS = sorted(MAKERS)


def moved(shift: float) -> Levels:
    """The vent with its trips and outputs somewhere else."""
    start = vent()
    return replace(
        start,
        lower=start.lower - shift,
        upper=start.upper + shift,
        width=start.width + 2 * shift,
        output_high=start.output_high - shift / 3,
        upper_interval=(2.52 + shift, 2.585 + shift),
    )


def made(kind: str, found: Levels, theme: str = "light", width: int = 700) -> Picture:
    maker, data = MAKERS[kind]
    picture: Picture = maker(theme, width)
    picture.update(data(found))
    return picture


@pytest.mark.parametrize("scale", [1, 2])
@pytest.mark.parametrize("theme", ["light", "dark", "any"])
@pytest.mark.parametrize("kind", KINDS)
def test_blitted_and_full_redraw_agree_pixel_by_pixel(kind: str, theme: str, scale: int) -> None:
    picture = made(kind, vent(), theme)
    picture.png(scale)
    picture.update(MAKERS[kind][1](moved(0.11)))
    blitted = pixels(picture.png(scale))
    full = pixels(picture.full_png(scale))
    afresh = pixels(made(kind, moved(0.11), theme).full_png(scale))
    assert np.array_equal(blitted, full)
    assert np.array_equal(blitted, afresh)
    assert np.array_equal(pixels(picture.png(scale)), full)


@pytest.mark.parametrize("kind", KINDS)
def test_the_picture_follows_its_data(kind: str) -> None:
    picture = made(kind, vent())
    before = pixels(picture.png())
    picture.update(MAKERS[kind][1](moved(0.11)))
    after = pixels(picture.png())
    assert before.shape == after.shape
    assert not np.array_equal(before, after)
    picture.update(MAKERS[kind][1](vent()))
    assert np.array_equal(pixels(picture.png()), before)


@pytest.mark.parametrize("kind", KINDS)
def test_it_comes_back_from_a_design_that_does_not_switch(kind: str) -> None:
    picture = made(kind, vent())
    before = pixels(picture.png())
    picture.update(MAKERS[kind][1](failed()))
    assert np.array_equal(pixels(picture.png()), pixels(picture.full_png()))
    assert "loop gain" in picture.alt
    picture.update(MAKERS[kind][1](vent()))
    assert np.array_equal(pixels(picture.png()), before)


@pytest.mark.parametrize("kind", KINDS)
def test_the_size_is_that_of_the_page_times_the_scale(kind: str) -> None:
    picture = made(kind, vent(), width=1400)
    for scale in (1, 2, 1.5):
        height, width, _ = pixels(picture.png(scale)).shape
        assert width == pytest.approx(1400 * scale, abs=1)
        assert height == pytest.approx(picture.height_px * scale, abs=1)


def test_a_transparent_picture_is_transparent_and_the_others_are_not() -> None:
    assert pixels(ruler(vent(), theme="any").png(1))[0, 0, 3] == 0
    assert tuple(pixels(ruler(vent(), theme="dark").png(1))[0, 0]) == (0x14, 0x18, 0x1D, 255)


@pytest.mark.parametrize("kind", KINDS)
def test_a_thousand_updates_leave_nothing_behind(kind: str) -> None:
    picture = made(kind, vent())
    picture.png(1)

    def census() -> tuple[int, int]:
        gc.collect()
        alive = [thing for thing in gc.get_objects() if isinstance(thing, Artist)]
        return sum(isinstance(thing, Figure) for thing in alive), len(alive)

    picture.update(MAKERS[kind][1](moved(0.2)))
    before = census()
    for step in range(1000):
        picture.update(MAKERS[kind][1](moved(0.1 * (step % 7) / 7 + 0.05)))
        if step % 50 == 0:
            picture.png(1)
    picture.update(MAKERS[kind][1](moved(0.2)))
    assert census() == before


@pytest.mark.parametrize("kind", KINDS)
def test_a_changing_background_leaves_nothing_behind_either(kind: str) -> None:
    picture = made(kind, vent())
    vents, failures = MAKERS[kind][1](vent()), MAKERS[kind][1](failed())

    def census() -> int:
        gc.collect()
        return sum(isinstance(thing, Artist) for thing in gc.get_objects())

    picture.png(1)
    before = census()
    for _ in range(30):
        picture.update(failures)
        picture.png(1)
        picture.update(vents)
        picture.png(1)
    assert census() == before


@pytest.mark.parametrize("kind", KINDS)
def test_moving_trips_do_not_redraw_the_background(kind: str) -> None:
    picture = made(kind, vent())
    for step in range(8):
        picture.update(MAKERS[kind][1](moved(0.02 * step)))
        picture.png()
    assert picture.full_redraws == 1


def test_a_layout_that_fails_does_not_stay() -> None:
    picture = ruler(vent())
    before = picture.png()

    class Broken:
        unit, name, span, decreasing = "V", "level", (0.0, 1.0), False

        def volts(self, quantity: float) -> float:
            raise ZeroDivisionError

        quantity = volts

    with pytest.raises(ZeroDivisionError):
        picture.update(replace(vent(), signal=Broken()))
    picture.update(vent())
    assert picture.png() == before


def test_restyling_is_the_same_as_a_new_picture() -> None:
    picture = ruler(vent())
    picture.restyle(theme="dark", width_px=700)
    new = ruler(vent(), theme="dark", width_px=700)
    assert picture.png() == new.png()
    assert (picture.theme.name, picture.width_px) == ("dark", 700)


@pytest.mark.parametrize("style", [
    {"text.hinting": "force_autohint", "font.size": 20.0, "lines.linewidth": 9.0},
    {"text.usetex": True, "axes.facecolor": "red", "savefig.facecolor": "red"},
    {"mathtext.fontset": "cm", "font.family": ["serif"], "savefig.dpi": 30},
])  # fmt: skip
def test_the_style_of_a_notebook_does_not_leak_in(style: dict[str, object]) -> None:
    def both() -> tuple[bytes, str]:
        picture = loop(loop_of(vent()))
        picture.png()
        picture.update(loop_of(moved(0.05)))
        return picture.png(), picture.svg()

    plain = both()
    with mpl.rc_context(style):
        assert both() == plain
        assert {name: mpl.rcParams[name] for name in style} == style


@pytest.mark.parametrize("kind", KINDS)
def test_svg_is_the_same_every_time_and_carries_no_date(kind: str) -> None:
    svg = made(kind, vent()).svg()
    assert svg == made(kind, vent()).svg()
    assert "<dc:date>" not in svg
    assert mpl.__version__ not in svg
    assert svg.count("<path") > 20


def test_svg_is_the_same_in_another_process() -> None:
    program = (
        "import hashlib; from hystkit.figures import ruler; from tests.figures.samples import vent;"
        "print(hashlib.sha256(ruler(vent()).svg().encode()).hexdigest())"
    )
    root = Path(__file__).parents[2]
    found = {
        subprocess.run(
            [sys.executable, "-c", program], cwd=root, check=True, capture_output=True, text=True,
            env={**os.environ, "PYTHONHASHSEED": seed},
        ).stdout
        for seed in ("1", "2")
    }  # fmt: skip
    assert len(found) == 1


def test_drawing_never_loads_pyplot() -> None:
    program = (
        "import sys; from hystkit.figures import ruler; from tests.figures.samples import vent;"
        "ruler(vent()).png(); ruler(vent()).svg(); print('matplotlib.pyplot' in sys.modules)"
    )
    root = Path(__file__).parents[2]
    done = subprocess.run(
        [sys.executable, "-c", program], cwd=root, check=True, capture_output=True, text=True
    )
    assert done.stdout.strip() == "False"


@pytest.mark.parametrize(("ending", "head"), [
    (".png", b"\x89PNG"), (".svg", b"<?xml"), (".pdf", b"%PDF"), (".PNG", b"\x89PNG"),
])  # fmt: skip
def test_files_are_written_and_not_replaced(tmp_path: Path, ending: str, head: bytes) -> None:
    picture = ruler(vent())
    path = tmp_path / f"ruler{ending}"
    assert picture.save(path) == path
    first = path.read_bytes()
    assert first.startswith(head)
    with pytest.raises(OutputExistsError, match="exists already"):
        picture.save(path)
    picture.save(str(path), overwrite=True)
    assert path.read_bytes() == first


def test_a_picture_that_cannot_be_written_is_told(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="cannot be written"):
        ruler(vent()).save(tmp_path / "missing" / "ruler.png")
    assert list(tmp_path.iterdir()) == []


def test_saving_leaves_the_picture_as_it_was(tmp_path: Path) -> None:
    picture = timeline(response_of(vent()))
    before = picture.png()
    picture.save(tmp_path / "time.pdf")
    picture.svg()
    assert picture.png() == before


def test_an_unknown_ending_is_refused(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"'.gif'") as caught:
        ruler(vent()).save(tmp_path / "ruler.gif")
    assert ".svg" in str(caught.value)


@pytest.mark.parametrize("kind", KINDS)
def test_too_narrow_a_picture_is_refused(kind: str) -> None:
    maker, _ = MAKERS[kind]
    with pytest.raises(InputError, match="narrow") as caught:
        maker(width_px=maker.min_width_px - 1)
    assert f"width_px >= {maker.min_width_px}" in str(caught.value)


def test_a_notebook_shows_it_at_its_own_size_with_its_text() -> None:
    picture = ruler(vent())
    data, about = picture._repr_png_()
    assert pixels(data).shape[1] == 2 * about["width"]
    assert about["alt"] == picture.alt
    assert repr(picture) == f"<RulerPicture: {picture.alt}>"


@pytest.mark.parametrize("shape", [(1, 1, 4), (3, 5, 4), (40, 300, 4)])
def test_png_bytes_are_read_back_by_others(shape: tuple[int, int, int]) -> None:
    image = np.random.default_rng(1).integers(0, 256, shape, dtype=np.uint8)
    assert np.array_equal(pixels(encode(image, 200)), image)


def test_the_picture_without_a_signal_is_lower() -> None:
    assert ruler(levels(1, 2)).height_px < ruler(vent()).height_px
