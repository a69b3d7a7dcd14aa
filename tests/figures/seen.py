"""What a reader of a picture would see: texts and lines, with their extent on the page."""

from __future__ import annotations

import io
from itertools import combinations

import numpy as np
from matplotlib.text import Text
from numpy.typing import NDArray
from PIL import Image

from hystkit.figures import Picture
from hystkit.figures.theme import PX_PER_INCH, drawing

Box = tuple[float, float, float, float]


def texts(picture: Picture) -> list[tuple[str, Box]]:
    """Every visible text with left, bottom, right, top [px of the page, upwards]."""
    figure = picture.figure
    figure.set_dpi(PX_PER_INCH)
    renderer = figure.canvas.get_renderer()
    with drawing():
        return [
            (text.get_text(), text.get_window_extent(renderer).extents)
            for text in figure.findobj(Text)
            if text.get_visible() and text.get_text()
        ]


def lines(picture: Picture, gid: str) -> list[Box]:
    """Straight lines of that name, as boxes without width."""
    figure = picture.figure
    figure.set_dpi(PX_PER_INCH)
    found = []
    for artist in figure.findobj(lambda artist: artist.get_gid() == gid):
        if not artist.get_visible():
            continue
        transform = artist.get_transform()
        paths = artist.get_paths() if hasattr(artist, "get_paths") else [artist.get_path()]
        for path in paths:
            corners = transform.transform(path.vertices)
            found.append((*corners.min(axis=0), *corners.max(axis=0)))
    return found


def overlap(one: Box, other: Box, slack: float = 0.25) -> bool:
    """Whether two boxes share more than their rim."""
    return (
        one[0] + slack < other[2]
        and other[0] + slack < one[2]
        and one[1] + slack < other[3]
        and other[1] + slack < one[3]
    )


def crosses(line: Box, box: Box) -> bool:
    """Whether an upright or level line runs through a box."""
    return (
        line[0] < box[2] - 0.25
        and line[2] > box[0] + 0.25
        and line[1] < box[3] - 0.25
        and line[3] > box[1] + 0.25
    )


def faults(picture: Picture, *gids: str) -> list[str]:
    """Texts that overlap, stick out of the page, or are crossed by a line of these names."""
    found = texts(picture)
    width, height = picture.width_px, picture.height_px
    bad = [
        f"{a!r} {np.round(box_a, 1)} overlaps {b!r} {np.round(box_b, 1)}"
        for (a, box_a), (b, box_b) in combinations(found, 2)
        if overlap(box_a, box_b)
    ]
    bad += [
        f"{text!r} {np.round(box, 1)} sticks out of {width} x {height}"
        for text, box in found
        if box[0] < 0 or box[1] < 0 or box[2] > width or box[3] > height
    ]
    bad += [
        f"{text!r} is crossed by a {gid} at {np.round(line, 1)}"
        for gid in gids
        for line in lines(picture, gid)
        for text, box in found
        if crosses(line, box)
    ]
    return bad


def pixels(png: bytes) -> NDArray[np.uint8]:
    """Red, green, blue and opacity of a PNG."""
    return np.asarray(Image.open(io.BytesIO(png)).convert("RGBA"))
