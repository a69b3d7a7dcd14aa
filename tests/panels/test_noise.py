"""The noise panel: request and design in one step, widths needed, samples, refusals."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np
import pytest

import hystkit as hk
from hystkit.base.errors import InputError, NoiseModelError, UnknownNameError
from hystkit.circuit.demo import header_tank
from tests.figures.test_noise import stuck
from tests.panels.front import own_circuit, registered, send, type_in

Make = Callable[..., hk.panels.NoisePanel]
NOISE = hk.Noise.two_pole(rms="50m", f1=100, f2="10k")


@pytest.fixture
def make() -> Iterator[Make]:
    """Make panels that are closed after the test."""
    made: list[hk.panels.NoisePanel] = []

    def one(design: hk.Design, **asked: object) -> hk.panels.NoisePanel:
        made.append(hk.panels.NoisePanel(design, **asked))
        return made[-1]

    yield one
    for panel in made:
        panel.close()


@pytest.fixture
def panel(make: Make) -> hk.panels.NoisePanel:
    return make(header_tank(), noise=NOISE, slope=0.5)


def rows(panel: hk.panels.NoisePanel) -> dict[str, tuple[str, ...]]:
    return {row[0]: row for row in panel.trips.rows[1:]}


def test_it_shows_what_the_analyses_give(panel: hk.panels.NoisePanel) -> None:
    width = float(panel.result.width)
    found = hk.chatter(width, NOISE, 0.5)
    shown = rows(panel)
    assert shown["width / rms"][1] == f"{width / 50e-3:.3g}"
    assert shown["switches again"][1] == f"{found.probability:.3g}"
    assert shown["extra cycles"][1] == f"{found.extra_cycles:.3g}"
    assert shown["early shift"][1] == f"{found.early_shift * 1e3:.3g} mV"
    needed = hk.width_for(probability=1e-3, noise=NOISE, slope=0.5)
    assert shown["needed, noise"][1] == f"{needed * 1e3:.3g} mV"
    # 1.2 V for a metre of water.
    assert float(shown["needed, noise"][-1]) == pytest.approx(needed / 1.2, rel=5e-3)
    standing = 3600 * hk.standing_cycles(width / 2, width / 2, NOISE)
    assert shown["false cycles, standing"][1] == f"{standing:.3g} per hour"
    assert "needed, hum" not in shown
    assert {len(row) for row in panel.trips.rows} == {4}
    assert panel.error == ""


def test_noise_of_a_known_kind_is_edited_by_its_numbers(panel: hk.panels.NoisePanel) -> None:
    section = panel.noise_section
    assert section.rows["f2"].field.value == "10 kHz"
    type_in(section.rows["f2"].field, "1M")
    assert panel.noise == hk.Noise.two_pole(rms="50m", f1=100, f2="1M")
    send(section.kind.field, index=1)
    assert panel.noise == hk.Noise.brick_wall(rms="50m", bandwidth=panel.request.bandwidth)
    assert section.rows["bandwidth"].widget in section._list.children
    assert section.rows["f2"].widget not in section._list.children
    send(section.kind.field, index=0)
    assert panel.noise == hk.Noise.two_pole(rms="50m", f1=100, f2="1M")


def test_a_single_pole_is_refused_in_its_field_with_reason_and_remedy(
    panel: hk.panels.NoisePanel,
) -> None:
    row, before = panel.noise_section.rows["f2"], panel.figure.image.value
    type_in(row.field, "")
    assert "single pole has no crossing rate" in row.note.text
    assert "bandwidth of the device as second pole" in row.note.text
    assert (panel.noise, panel.figure.image.value) == (NOISE, before)
    with pytest.raises(NoiseModelError, match="single pole"):
        panel.set(f2=None)
    type_in(row.field, "20k")
    assert row.note.text == ""
    assert panel.request.f2 == 20e3


def test_noise_of_ones_own_is_shown_but_not_edited(make: Make) -> None:
    record = hk.Noise.brick_wall(rms="20m", bandwidth="1k").generate(5, "50k", seed=3)
    own = hk.Noise.from_samples(record, "50k")
    panel = make(header_tank(), noise=own, slope="0.4 V/s")
    assert panel.noise is own
    assert "up-crossings in" in panel.noise_section.remark.value
    assert panel.noise_section._list.children == (panel.noise_section.remark,)
    panel.set(slope=0.2)
    assert panel.noise is own
    send(panel.noise_section.kind.field, index=0)
    assert panel.request.kind == "two poles"
    send(panel.noise_section.kind.field, index=2)
    assert panel.noise is own


def test_without_noise_of_ones_own_it_cannot_be_chosen(panel: hk.panels.NoisePanel) -> None:
    send(panel.noise_section.kind.field, index=2)
    assert "no noise of your own" in panel.noise_section.kind.note.text.lower()
    assert panel.request.kind == panel.noise_section.kind.field.value == "two poles"


def test_hum_has_its_own_need_and_adds_to_that_of_the_noise(panel: hk.panels.NoisePanel) -> None:
    type_in(panel.noise_section.rows["hum_amplitude"].field, "30m")
    type_in(panel.noise_section.frequency.field, "100")
    need = hk.hum_width(30e-3, 100, 0.5)
    assert rows(panel)["needed, hum"][1] == f"{need * 1e3:.3g} mV"
    assert panel.scene.together == pytest.approx(panel.scene.needed + need)
    assert "hum needs" in panel.figure.words.value
    type_in(panel.noise_section.rows["hum_amplitude"].field, "")
    assert panel.request.hum is None
    assert "needed, hum" not in rows(panel)


def test_another_sample_moves_nothing_but_the_waveform(panel: hk.panels.NoisePanel) -> None:
    scene, picture = panel.scene, panel.figure.image.value
    drawn = panel.sample.image.value
    panel.sample_button.click()
    assert panel.request.seed == 1
    assert not np.array_equal(panel.scene.sample.signal, scene.sample.signal)
    assert panel.sample.image.value != drawn
    assert panel.figure.image.value == picture


@pytest.mark.parametrize("name", ["rms", "f1", "f2", "slope", "hum_amplitude"])
def test_a_slider_moves_both_pictures(panel: hk.panels.NoisePanel, name: str) -> None:
    panel.set(hum=("20m", 50))
    before = [view.image.value for view in (panel.figure, panel.sample)]
    row = panel.noise_section.rows[name]
    send(row.slider, value=row.slider.value + 3)
    after = [view.image.value for view in (panel.figure, panel.sample)]
    assert all(new != old for new, old in zip(after, before, strict=True))
    assert panel.error == ""


def test_a_part_moves_all_pictures(panel: hk.panels.NoisePanel) -> None:
    views = (panel.ruler, panel.figure, panel.sample, panel.schematic)
    before = [view.image.value for view in views]
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 20)
    assert all(view.image.value != old for view, old in zip(views, before, strict=True))
    assert panel.scene.width == pytest.approx(float(panel.result.width))


def test_findings_know_the_noise(panel: hk.panels.NoisePanel) -> None:
    assert panel.reviewed["noise"].severity == "pass"
    assert panel.reviewed["noise"].margin == pytest.approx(panel.scene.margin)
    panel.set(rms="0.3")
    assert panel.reviewed["noise"].severity in ("warning", "fault")
    assert "noise" in panel.findings.widget.value
    assert "too narrow" in panel.figure.words.value


def test_design_and_request_change_in_one_step(panel: hk.panels.NoisePanel) -> None:
    seen: list[object] = []
    panel.observe(lambda change: seen.append(panel.request.rms), names="design")
    panel.set(R_F="120k", rms="40m", hum=("10m", 50), noise=hk.Noise.brick_wall(rms=1, bandwidth=9))
    assert seen == [0.04]
    assert panel.design.parts["R_F"].value == 120e3
    assert panel.noise == hk.Noise.brick_wall(rms=0.04, bandwidth=9)


@pytest.mark.parametrize(
    ("name", "text", "said"),
    [
        ("rms", "nothing", "not a number"),
        ("rms", "-1m", "not positive"),
        ("f1", "4,7k", "Pole"),
        ("slope", "0", "not positive"),
        ("slope", "1 A", "not in V/s"),
        ("hum_amplitude", "-3m", "not positive"),
        ("hum_frequency", "0", "not positive"),
        ("probability", "2", "always met"),
        ("probability", "often", "not a number"),
    ],
)
def test_a_refusal_stands_at_its_field_and_all_else_stays(
    panel: hk.panels.NoisePanel, name: str, text: str, said: str
) -> None:
    section = panel.noise_section
    found = {**section.rows, **panel.asked.rows, "hum_frequency": section.frequency}
    row = found[name]
    before, picture = panel.request, panel.figure.image.value
    type_in(row.field, text)
    assert said in row.note.text
    assert (panel.request, panel.figure.image.value) == (before, picture)
    assert row.field.value == text
    assert panel.error == ""
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 1)
    assert row.note.text == ""


def test_an_allowed_probability_that_is_left_empty_is_the_usual_one(
    panel: hk.panels.NoisePanel,
) -> None:
    type_in(panel.asked.rows["probability"].field, "1e-5")
    assert panel.scene.allowed == 1e-5
    type_in(panel.asked.rows["probability"].field, "")
    assert panel.scene.allowed == 1e-3
    assert panel.asked.rows["probability"].field.value == "0.001"


def test_what_is_typed_is_escaped(panel: hk.panels.NoisePanel) -> None:
    row = panel.noise_section.rows["rms"]
    type_in(row.field, "<img src=x onerror=alert(1)>")
    assert "<img" not in row.note.text


def test_several_faults_of_a_call_change_nothing(panel: hk.panels.NoisePanel) -> None:
    design, request = panel.design, panel.request
    with pytest.raises(InputError) as caught:
        panel.set(R_F="120k", slope=-1, probability=3, hum=(-1, 50))
    assert len(caught.value.faults) == 3
    with pytest.raises(InputError):
        panel.set(noise=3)
    with pytest.raises(UnknownNameError):
        panel.set(slop=1)
    assert (panel.design, panel.request) == (design, request)


def test_it_begins_with_noise_that_suits_the_band(make: Make) -> None:
    for design in (header_tank(), own_circuit(), header_tank().with_signal(None)):
        panel = make(design)
        assert panel.error == ""
        assert panel.scene.margin > 0


def test_a_design_without_a_band_is_said_and_recovered_from(make: Make) -> None:
    panel = make(stuck())
    assert panel.error == ""
    assert not panel.result.ok
    assert panel.chatter is None
    assert "No sample" in panel.sample.words.value
    assert "needed, noise" in rows(panel)
    assert "switches again" not in rows(panel)
    panel.set(R_4="10M", R_3="10M")
    assert panel.error == ""
    assert panel.result.ok
    assert "switches again" in rows(panel)


def test_without_a_slope_it_begins_with_one_that_suits_the_noise(make: Make) -> None:
    panel = make(header_tank(), noise=NOISE.scaled(1e-3), hum=["1m", 50])
    crossings = panel.noise.crossing_rate * panel.noise.rms / panel.request.slope
    assert crossings == pytest.approx(100, rel=0.2)
    assert panel.request.hum == (1e-3, 50)


def test_pictures_follow_the_room_of_the_page(panel: hk.panels.NoisePanel) -> None:
    _, room, _ = panel.children
    for width in (1050, 700, 420):
        send(room, value=str(width))
        assert panel.sample.picture.width_px == panel.figure.picture.width_px
    assert panel.error == ""


def test_the_snapshot_holds_all_pictures_and_the_table(panel: hk.panels.NoisePanel) -> None:
    still = panel.snapshot()
    assert len(still.stills) == 4
    assert any("Sample of a signal" in one.alt for one in still.stills)
    assert any(one.alt.startswith("Band with") for one in still.stills)
    assert "needed, noise" in str(still)
    assert "needed for noise" in panel.trips.copy.text


def test_closing_closes_every_widget() -> None:
    before = registered()
    panel = hk.panels.NoisePanel(header_tank(), noise=NOISE, hum=("30m", 50))
    send(panel.noise_section.kind.field, index=1)
    panel.another_sample()
    panel.close()
    assert registered() == before
