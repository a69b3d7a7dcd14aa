from __future__ import annotations

import io
import random
from collections.abc import Iterable, Iterator
from itertools import combinations

import matplotlib.pyplot as plt
import numpy as np
import pytest
from matplotlib.text import Text
from matplotlib.transforms import Bbox
from PIL import Image

from hystkit.base.errors import InputError
from hystkit.circuit.checks import infer_sense
from hystkit.circuit.design import Design
from hystkit.circuit.elements import FIXED_NODES, Element, Resistor, Wire
from hystkit.circuit.netlist import netlist
from hystkit.circuit.parts import Supply
from hystkit.circuit.signals import Linear
from hystkit.circuit.stage import Stage
from hystkit.figures.schematic import SchematicPicture, schematic, value_texts
from hystkit.figures.schematic_custom import routed_sheet
from hystkit.figures.schematic_forms import form_sheet
from hystkit.figures.schematic_list import listed_sheet
from hystkit.figures.schematic_sheet import Point, Sheet
from hystkit.figures.theme import PX_PER_INCH, THEMES

LEVEL = Linear(1.2, 0.6, span=(0, 2), unit="m", name="level in the rain water tank")


def fitted_stages() -> Iterator[Stage]:
    """Give every built-in form with every set of optional parts."""
    for stage in Stage.all():
        for count in range(len(stage.optional) + 1):
            for names in combinations(stage.optional, count):
                yield stage.with_options(*names)


STAGES = list(fitted_stages())
FULL = [stage.with_options(*stage.optional) for stage in Stage.all()]


def design_of(stage: Stage, ohms: float = 46420.0, signal: Linear | None = LEVEL) -> Design:
    supply = Supply(12.5, -12.75) if stage.supply == "split" else Supply(12.5)
    wanted = {"V_REF": -1.234, "V_PU": 10.25, "V_L": -0.725}
    levels = {name: wanted[name] for name in stage.levels if name in wanted}
    parts = dict.fromkeys(stage.parts, ohms)
    return Design(stage, parts, supply=supply, levels=levels, signal=signal)


def sheet_of(stage: Stage) -> Sheet:
    return form_sheet(
        stage.elements,
        split=stage.supply == "split",
        open_collector=stage.output == "open-collector",
    )


def title(stage: Stage) -> str:
    return ", ".join((stage.title, *stage.including))


# -- reading a drawing back into a circuit ---------------------------------------------------


class Ink:
    """Points that the ink of a drawing connects, found without using the layout's own logic."""

    def __init__(self) -> None:
        self.parent: dict[object, object] = {}

    def root(self, thing: object) -> object:
        self.parent.setdefault(thing, thing)
        while self.parent[thing] != thing:
            thing = self.parent[thing]
        return thing

    def join(self, a: object, b: object) -> None:
        self.parent[self.root(a)] = self.root(b)


def near(point: Point) -> Point:
    return (round(point[0], 6), round(point[1], 6))


def on_segment(p: Point, a: Point, b: Point) -> bool:
    (px, py), (ax, ay), (bx, by) = near(p), near(a), near(b)
    straight = (bx - ax) * (py - ay) == (by - ay) * (px - ax)
    return straight and min(ax, bx) <= px <= max(ax, bx) and min(ay, by) <= py <= max(ay, by)


def drawn_nets(sheet: Sheet) -> dict[str, frozenset[str]]:
    """Map each end of a resistor and each pin to everything that the ink joins it with."""
    ink = Ink()
    things: dict[str, Point] = {}
    for body in sheet.bodies:
        things[f"{body.name}:0"], things[f"{body.name}:1"] = body.start, body.end
    things |= {f"pin {pin}": at for pin, at in sheet.comparator.pins.items()}
    spots = [near(p) for p in things.values()] + [near(t.at) for t in sheet.terminals]
    corners = [near(p) for line in sheet.lines for p in line.points]
    for line in sheet.lines:
        for a, b in line.segments:
            for p in (*spots, *corners):
                # A line that merely crosses has no point of its own on the other one.
                if on_segment(p, a, b):
                    ink.join(p, near(a))
            ink.join(near(a), near(b))
    for terminal in sheet.terminals:
        ink.join(near(terminal.at), f"node {terminal.node}")
    members: dict[object, set[str]] = {}
    for name, at in things.items():
        members.setdefault(ink.root(near(at)), set()).add(name.split(":")[0])
    for node in FIXED_NODES:
        members.setdefault(ink.root(f"node {node}"), set()).add(f"node {node}")
    return {name: frozenset(members[ink.root(near(at))]) for name, at in things.items()}


def declared_nets(elements: Iterable[Element]) -> dict[str, frozenset[str]]:
    """Do the same for the declared circuit."""
    net = netlist(elements)
    members: dict[str, set[str]] = {}
    for resistor in net.resistors:
        for node in resistor.nodes:
            members.setdefault(node, set()).add(resistor.name)
    for pin in ("plus", "minus", "out", "cc", "ee"):
        members.setdefault(net.merged.get(pin, pin), set()).add(f"pin {pin}")
    for node in FIXED_NODES:
        members.setdefault(node, set()).add(f"node {node}")
    nets = {
        f"{r.name}:{end}": frozenset(members[node])
        for r in net.resistors
        for end, node in enumerate(r.nodes)
    }
    pins = ("plus", "minus", "out", "cc", "ee")
    return nets | {f"pin {pin}": frozenset(members[net.merged.get(pin, pin)]) for pin in pins}


def without_direction(nets: dict[str, frozenset[str]]) -> dict[str, list[list[str]]]:
    """Forget which end of a resistor is which."""
    found: dict[str, list[list[str]]] = {}
    for name, members in nets.items():
        found.setdefault(name.split(":")[0], []).append(sorted(members))
    return {name: sorted(ends) for name, ends in found.items()}


def assert_realises(sheet: Sheet, elements: Iterable[Element]) -> None:
    assert without_direction(drawn_nets(sheet)) == without_direction(declared_nets(elements))


def assert_clean(sheet: Sheet) -> None:
    """No junction of four, no symbol on another one, no line through a symbol or along another."""
    dotted = {near(dot) for dot in sheet.dots}
    for point in sheet.joints:
        assert sheet.arms(point) <= 3, point
        assert (sheet.arms(point) == 3) == (near(point) in dotted)
    boxes = [body.box for body in sheet.bodies] + [end.box for end in sheet.terminals]
    for number, box in enumerate(boxes):
        assert not any(overlap(box, other) for other in boxes[:number]), box
    assert not any(overlap(sheet.comparator.box, body.box) for body in sheet.bodies)
    segments = [s for line in sheet.lines for s in line.segments]
    for number, (a, b) in enumerate(segments):
        stretch = (min(a[0], b[0]), min(a[1], b[1]), max(a[0], b[0]), max(a[1], b[1]))
        assert not any(overlap(stretch, body.box) for body in sheet.bodies), (a, b)
        assert not any(parallel(a, b, *other) for other in segments[:number]), (a, b)


def parallel(a: Point, b: Point, c: Point, d: Point) -> bool:
    """Tell whether two stretches of line run along each other."""
    level = (a[0] == b[0] == c[0] == d[0], a[1] == b[1] == c[1] == d[1])
    if not any(level):
        return False
    axis = 1 if level[0] else 0
    (p, q), (r, s) = sorted((a[axis], b[axis])), sorted((c[axis], d[axis]))
    return bool(p < s - 1e-9 and r < q - 1e-9)


def overlap(a: tuple[float, ...], b: tuple[float, ...]) -> bool:
    gap = 1e-9
    return bool(a[0] < b[2] - gap and b[0] < a[2] - gap and a[1] < b[3] - gap and b[1] < a[3] - gap)


def crossings(sheet: Sheet) -> int:
    """Count where two lines cross without touching."""
    segments = [s for line in sheet.lines for s in line.segments]
    segments += [(body.start, body.end) for body in sheet.bodies]
    flat = [s for s in segments if s[0][1] == s[1][1]]
    tall = [s for s in segments if s[0][0] == s[1][0]]
    return sum(
        min(a[0], b[0]) < c[0] < max(a[0], b[0]) and min(c[1], d[1]) < a[1] < max(c[1], d[1])
        for a, b in flat
        for c, d in tall
    )


# -- reading the texts of a picture ----------------------------------------------------------


def texts_of(picture: SchematicPicture) -> list[tuple[Text, Bbox]]:
    """Give each text with the extent that the renderer finds for it, in px of the page."""
    renderer = picture._canvas.get_renderer()
    scale = PX_PER_INCH / picture.figure.dpi
    found = []
    for text in picture.figure.axes[0].texts:
        if text.get_text():
            extent = text.get_window_extent(renderer)
            found.append((text, Bbox(extent.get_points() * scale)))
    return found


def in_px(picture: SchematicPicture, box: tuple[float, ...]) -> Bbox:
    corners = picture.figure.axes[0].transData.transform([box[:2], box[2:]])
    return Bbox(corners * PX_PER_INCH / picture.figure.dpi)


def assert_legible(picture: SchematicPicture) -> None:
    """Texts lie on the paper, clear of each other, of every symbol and of every line."""
    assert picture.sheet is not None
    sheet = picture.sheet
    boxes = [body.box for body in sheet.bodies] + [end.box for end in sheet.terminals]
    ink = [in_px(picture, box) for box in (*boxes, sheet.comparator.box)]
    for line in sheet.lines:
        for (x0, y0), (x1, y1) in line.segments:
            edges = (min(x0, x1), min(y0, y1), max(x0, x1), max(y0, y1))
            ink.append(in_px(picture, edges).padded(0.5))
    texts = texts_of(picture)
    paper = Bbox([[0, 0], [picture.width_px, picture.height_px]])
    for number, (text, extent) in enumerate(texts):
        words = text.get_text()
        assert paper.x0 <= extent.x0, words
        assert extent.x1 <= paper.x1, words
        assert paper.y0 <= extent.y0, words
        assert extent.y1 <= paper.y1, words
        for other, beside in texts[:number]:
            assert not touches(extent, beside), (words, other.get_text())
        for drawn in ink:
            assert not touches(extent, drawn), words


def touches(a: Bbox, b: Bbox) -> bool:
    return overlap((a.x0, a.y0, a.x1, a.y1), (b.x0, b.y0, b.x1, b.y1))


# -- built-in forms --------------------------------------------------------------------------


@pytest.mark.parametrize("stage", STAGES, ids=title)
def test_drawing_realises_the_declared_circuit(stage: Stage) -> None:
    assert_realises(sheet_of(stage), stage.elements)


def test_reading_notices_a_wire_that_is_missing() -> None:
    sheet = sheet_of(FULL[0])
    short = Sheet(sheet.comparator, sheet.bodies, sheet.lines[1:], sheet.terminals)
    with pytest.raises(AssertionError):
        assert_realises(short, FULL[0].elements)


@pytest.mark.parametrize("stage", STAGES, ids=title)
def test_drawing_is_clean_and_nothing_crosses(stage: Stage) -> None:
    sheet = sheet_of(stage)
    assert_clean(sheet)
    assert crossings(sheet) == 0


def test_texts_are_legible_in_every_form_at_the_least_width() -> None:
    picture = SchematicPicture(width_px=SchematicPicture.min_width_px)
    for stage in STAGES:
        picture.update(design_of(stage))
        assert_legible(picture)


@pytest.mark.parametrize("width", [360, 520, 900, 1400])
def test_texts_are_legible_at_other_widths(width: int) -> None:
    picture = SchematicPicture(width_px=width)
    for stage in FULL:
        picture.update(design_of(stage))
        assert_legible(picture)


@pytest.mark.parametrize("stage", FULL, ids=title)
def test_every_part_stands_there_with_name_and_value(stage: Stage) -> None:
    design = design_of(stage)
    picture = schematic(design)
    written = [text.get_text() for text, _ in texts_of(picture)]
    for name in stage.parts:
        head, index = name.split("_")
        assert written.count(rf"${head}_\mathrm{{{index}}}$") == 1
    assert written.count("46k42") == len(stage.parts)
    assert "12.5 V" in written
    assert ("−12.75 V" in written) == (stage.supply == "split")


def test_smallest_letters_are_9_px() -> None:
    picture = schematic(design_of(FULL[-1]), width_px=SchematicPicture.min_width_px)
    for text, _ in texts_of(picture):
        size = float(text.get_fontsize()) * PX_PER_INCH / 72
        # mathtext sets an index at 0.7 of the letter beside it
        assert size * (0.7 if "$" in text.get_text() else 1.0) >= 9.0


def test_long_quantity_is_cut_on_paper_and_whole_in_alt() -> None:
    picture = schematic(design_of(FULL[0]), width_px=360)
    written = [text.get_text() for text, _ in texts_of(picture)]
    assert any(words.startswith("level") and words.endswith("…") for words in written)
    assert LEVEL.name in picture.alt


def test_quantity_is_plain_text_whatever_it_holds() -> None:
    odd = Linear(1.0, span=(0, 1), name="$x^2$ <b>\nflow")
    written = [t.get_text() for t, _ in texts_of(schematic(design_of(FULL[0], signal=odd)))]
    assert "$x^2$ <b> flow" in written
    schematic(design_of(FULL[0], signal=odd)).png()


@pytest.mark.parametrize("stage", FULL, ids=title)
def test_alt_lists_every_element_with_its_value(stage: Stage) -> None:
    alt = schematic(design_of(stage)).alt
    for name in stage.parts:
        assert f"{name} 46.42 kΩ from " in alt
    assert "the signal" in alt
    assert stage.title in alt


# -- updating --------------------------------------------------------------------------------


@pytest.mark.parametrize("theme", sorted(THEMES))
def test_new_values_only_move_the_texts(theme: str) -> None:
    picture = SchematicPicture(theme)
    design = design_of(FULL[1])
    picture.update(design)
    before = picture.png()
    for ohms in ("1k", "4k75", "102k", "R47"):
        picture.update(design.with_parts(R_F=ohms, R_T=ohms).with_supply(v_cc=9.1))
        blitted = picture.png()
    assert picture.full_redraws == 1
    assert blitted != before
    assert np.array_equal(pixels(blitted), pixels(picture.full_png()))


def test_new_structure_is_drawn_afresh() -> None:
    picture = SchematicPicture()
    for stage in FULL[::3]:
        picture.update(design_of(stage))
        updated = pixels(picture.png())
        assert np.array_equal(updated, pixels(schematic(design_of(stage)).png()))


def test_longer_value_than_there_is_room_for_is_drawn_afresh() -> None:
    picture = SchematicPicture(width_px=360)
    design = design_of(FULL[2])
    picture.update(design.with_levels(V_REF="2.5"))
    picture.png()
    wide = design.with_levels(V_REF="-1.2345678e9")
    assert len(value_texts(wide)["V_REF"]) > len(value_texts(design)["V_REF"])
    picture.update(wide)
    picture.png()
    assert picture.full_redraws == 2
    assert_legible(picture)


def test_pyplot_holds_no_figure() -> None:
    for theme in THEMES:
        schematic(design_of(FULL[3]), theme).png()
    assert plt.get_fignums() == []


def test_any_theme_is_transparent_and_the_others_are_not() -> None:
    for name, opaque in (("light", True), ("dark", True), ("any", False)):
        corner = pixels(schematic(design_of(FULL[0]), name).png())[0, 0]
        assert bool(corner[3] == 255) is opaque


def test_own_schemdraw_style_does_not_leak_in() -> None:
    import schemdraw

    plain = schematic(design_of(FULL[0])).png()
    schemdraw.config(color="red", lw=9, bgcolor="yellow", fill="blue", ls="--")
    try:
        styled = schematic(design_of(FULL[0])).png()
    finally:
        schemdraw.config()
        schemdraw.schemdraw.schemdrawstyle.pop("bgcolor", None)
    assert np.array_equal(pixels(plain), pixels(styled))


def test_svg_is_the_same_each_time() -> None:
    assert schematic(design_of(FULL[5])).svg() == schematic(design_of(FULL[5])).svg()


def test_too_narrow_is_refused() -> None:
    with pytest.raises(InputError, match="340"):
        SchematicPicture(width_px=339)


def pixels(png: bytes) -> np.ndarray:
    return np.asarray(Image.open(io.BytesIO(png)).convert("RGBA"))


# -- circuits of one's own -------------------------------------------------------------------

R = Resistor
TEE = (
    R("R_1", "out", "x"),
    R("R_2", "x", "plus"),
    R("R_3", "x", "ground"),
    R("R_4", "plus", "ref"),
    R("R_5", "signal", "minus"),
    R("R_6", "minus", "ground"),
)


def random_circuit(seed: int) -> tuple[Element, ...]:
    """Wire up to 14 resistors at random: each node reachable, everything else by chance."""
    rng = random.Random(seed)
    inner = [f"n{i}" for i in range(rng.randrange(5))]
    free = ["plus", "out", *inner]
    elements: list[Element] = [R("R_F", "out", "plus")]
    if rng.random() < 0.5:
        elements.append(Wire("minus", rng.choice(["signal", "ref", "ground", "cc"])))
    else:
        free.append("minus")
    ends = [*free, *FIXED_NODES]
    pairs = [(node, rng.choice([end for end in ends if end != node])) for node in free * 2]
    pairs += [tuple(rng.sample(ends, 2)) for _ in range(max(0, 13 - len(pairs)))]
    pairs = pairs[: rng.randrange(len(free) * 2, len(pairs) + 1)]
    return (*elements, *(R(f"R_{i}", a, b) for i, (a, b) in enumerate(pairs)))


RANDOM = [random_circuit(seed) for seed in range(70)]


@pytest.mark.parametrize("elements", [TEE, *RANDOM], ids=range(len(RANDOM) + 1))
def test_own_circuit_is_realised_by_both_drawings(elements: tuple[Element, ...]) -> None:
    for split in (False, True):
        routed = routed_sheet(elements, split=split, open_collector=split)
        listed = listed_sheet(elements, split=split, open_collector=split, columns=2)
        for sheet in (routed, listed):
            assert_realises(sheet, elements)
            assert_clean(sheet)


def test_usual_own_circuit_has_no_crossing() -> None:
    assert crossings(routed_sheet(TEE, split=False, open_collector=False)) == 0


def test_own_circuit_is_planned_the_same_each_time() -> None:
    first = routed_sheet.__wrapped__(RANDOM[7], split=True, open_collector=False)
    assert first == routed_sheet.__wrapped__(RANDOM[7], split=True, open_collector=False)


@pytest.mark.parametrize("width", [340, 520, 900])
def test_own_circuits_are_legible(width: int) -> None:
    picture = SchematicPicture(width_px=width)
    drawn = 0
    for elements in [TEE, *RANDOM[:40]]:
        # Where the signal reaches both inputs the sense is open, and has to be given.
        sense = None if infer_sense(elements) else "inverting"
        try:
            stage = Stage.custom(elements, supply="split", sense=sense)
        except InputError:  # by chance it cannot switch
            continue
        picture.update(design_of(stage))
        assert_legible(picture)
        drawn += 1
    assert drawn > 20


def test_own_circuit_says_its_wires_in_alt() -> None:
    stage = Stage.custom(
        (
            R("R_F", "out", "plus"),
            R("R_1", "plus", "k"),
            R("R_2", "k", "cc"),
            Wire("signal", "minus"),
        )
    )
    alt = schematic(design_of(stage)).alt
    assert "R_1 46.42 kΩ from the plus input to node k" in alt
    assert "Wire from the signal to the minus input" in alt


def test_own_names_need_no_index() -> None:
    wiring = (R("Rfb", "out", "plus"), R("R12", "plus", "cc"), Wire("signal", "minus"))
    picture = schematic(design_of(Stage.custom(wiring)))
    written = [text.get_text() for text, _ in texts_of(picture)]
    assert {"Rfb", "R12"} <= {*written}
    assert written.count("46k42") == 2
