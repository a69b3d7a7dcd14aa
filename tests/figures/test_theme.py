"""Colours that everybody can read and tell apart."""

from __future__ import annotations

from itertools import combinations

import matplotlib as mpl
import numpy as np
import pytest
from numpy.typing import NDArray

from hystkit.base.errors import UnknownNameError
from hystkit.figures import MARKS, THEMES, Theme
from hystkit.figures.theme import drawing, letters, symbol, theme_of

TEXTS = ("text", "muted", "upper", "lower", "band", "warning")
GRAPHICS = ("line", "signal", "common_mode", "output", "reference", *TEXTS)
# What a reader has to tell apart by colour or mark; text stands for the output as well.
TOLD_APART = ("text", "upper", "lower", "band", "signal")
PAPERS = {"light": ["#ffffff"], "dark": ["#14181d", "#111111"], "any": ["#ffffff", "#111111"]}

# Full dichromacy, for linear sRGB: G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, A
# physiologically-based model for simulation of color vision deficiency, IEEE Transactions on
# Visualization and Computer Graphics 15 (2009), 1291-1298.
VISION = {
    "normal": np.eye(3),
    "protanopia": np.array([
        [0.152286, 1.052583, -0.204868],
        [0.114503, 0.786281, 0.099216],
        [-0.003882, -0.048116, 1.051998],
    ]),
    "deuteranopia": np.array([
        [0.367322, 0.860646, -0.227968],
        [0.280085, 0.672501, 0.047413],
        [-0.011820, 0.042940, 0.968881],
    ]),
}  # fmt: skip
# Linear sRGB to CIE XYZ (IEC 61966-2-1), white D65.
TO_XYZ = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])


def linear(colour: str) -> NDArray[np.float64]:
    """Linear sRGB of a colour."""
    values = np.array(mpl.colors.to_rgb(colour))
    return np.where(values <= 0.04045, values / 12.92, ((values + 0.055) / 1.055) ** 2.4)


def contrast(one: str, other: str) -> float:
    """Contrast ratio as WCAG 2.2 defines it."""
    light, dark = sorted((float(TO_XYZ[1] @ linear(c)) for c in (one, other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def lab(colour: str, vision: str) -> NDArray[np.float64]:
    """CIE L*a*b* of a colour as it is seen."""
    seen = np.clip(VISION[vision] @ linear(colour), 0, 1)
    x, y, z = TO_XYZ @ seen / (TO_XYZ @ np.ones(3))
    f = [np.cbrt(t) if t > (6 / 29) ** 3 else t / (3 * (6 / 29) ** 2) + 4 / 29 for t in (x, y, z)]
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


def test_the_measures_themselves() -> None:
    assert contrast("#ffffff", "#000000") == pytest.approx(21)
    assert contrast("#7a7a7a", "#ffffff") == pytest.approx(4.3, abs=0.05)
    assert lab("#ffffff", "normal") == pytest.approx([100, 0, 0], abs=0.1)
    red, green = lab("#c00000", "protanopia"), lab("#404000", "protanopia")
    assert np.linalg.norm(red - green) < np.linalg.norm(
        lab("#c00000", "normal") - lab("#404000", "normal")
    )


@pytest.mark.parametrize("name", THEMES)
def test_graphics_stand_out_from_every_paper(name: str) -> None:
    theme = THEMES[name]
    poor = {
        (role, paper): round(contrast(getattr(theme, role), paper), 2)
        for role in GRAPHICS
        for paper in PAPERS[name]
        if contrast(getattr(theme, role), paper) < 3
    }
    assert poor == {}


@pytest.mark.parametrize(("name", "least"), [("light", 4.5), ("dark", 4.5), ("any", 4.1)])
def test_texts_are_readable(name: str, least: float) -> None:
    """On white and near-black at once 4.5 cannot be had: the product of both is at most 19."""
    theme = THEMES[name]
    poor = {
        (role, paper): round(contrast(getattr(theme, role), paper), 2)
        for role in TEXTS
        for paper in PAPERS[name]
        if contrast(getattr(theme, role), paper) < least
    }
    assert poor == {}


@pytest.mark.parametrize("vision", VISION)
@pytest.mark.parametrize("name", THEMES)
def test_colours_can_be_told_apart(name: str, vision: str) -> None:
    """A CIE 1976 distance of 2.3 is just noticeable; ask for several times that."""
    seen = {role: lab(getattr(THEMES[name], role), vision) for role in TOLD_APART}
    apart = {(a, b): np.linalg.norm(seen[a] - seen[b]) for a, b in combinations(TOLD_APART, 2)}
    assert {pair: distance for pair, distance in apart.items() if distance < 10} == {}


@pytest.mark.parametrize("vision", VISION)
@pytest.mark.parametrize("name", THEMES)
def test_upper_and_lower_are_far_apart_for_everybody(name: str, vision: str) -> None:
    theme = THEMES[name]
    assert np.linalg.norm(lab(theme.upper, vision) - lab(theme.lower, vision)) > 60


def test_no_two_levels_share_line_and_marker() -> None:
    looks = [(mark.dashes, mark.marker, mark.filled) for mark in MARKS.values()]
    assert len(set(looks)) == len(looks)


def test_a_theme_is_found_by_name_or_passed_through() -> None:
    own = Theme(**{**vars(THEMES["light"]), "name": "paper", "background": "#fffff0"})
    assert theme_of("dark") is THEMES["dark"]
    assert theme_of(own) is own


def test_an_unknown_theme_names_the_nearest() -> None:
    with pytest.raises(UnknownNameError, match="ligth") as caught:
        theme_of("ligth")
    assert caught.value.faults[0].remedy == "light"
    assert "light, dark, any" in caught.value.faults[0].have


@pytest.mark.parametrize(
    ("name", "shown"),
    [
        ("V_CC", r"$V_\mathrm{CC}$"),
        ("R_F", r"$R_\mathrm{F}$"),
        ("R_1", r"$R_\mathrm{1}$"),
        ("GND", "GND"),
        ("a$b", r"a\$b"),
        ("x_{y", "x_{y"),
    ],
)
def test_symbols_lower_their_index(name: str, shown: str) -> None:
    assert symbol(name) == shown


def test_drawing_leaves_the_settings_of_the_notebook_alone() -> None:
    with mpl.rc_context({"text.usetex": True, "font.size": 31.0}):
        before = dict(mpl.rcParams)
        with drawing():
            assert not mpl.rcParams["text.usetex"]
        assert dict(mpl.rcParams) == before


def test_letters_are_measured_in_px() -> None:
    assert letters("text").get_size_in_points() == pytest.approx(12.5 * 0.72)
