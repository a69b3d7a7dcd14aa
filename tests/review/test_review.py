"""Every check of a review: what provokes it, what clears it, and its margin by hand or oracle."""

from __future__ import annotations

import math
import re
from itertools import product
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.review.finding import SIGNS
from tests.circuit.strategies import designs
from tests.numeric import nodal

S = hk.signals
LEVEL = S.Linear(1.0, span=(0, 5), unit="m", name="level")


def stage(**choices: str) -> hk.Stage:
    return hk.Stage("inverting", **{"reference": "source", **choices})


def plain(**changes: Any) -> hk.Design:
    """Trips at 2.75 V and 2.25 V: a tenth of the output comes back to 2.5 V."""
    given: dict[str, Any] = {
        "parts": {"R_R": "10k", "R_F": "90k"},
        "supply": 5.0,
        "levels": {"V_REF": 2.5},
        **changes,
    }
    return hk.Design(given.pop("stage", stage()), given.pop("parts"), **given)


def device(**fields: Any) -> hk.Design:
    return plain(device=hk.Device(**fields))


def divided(**changes: Any) -> hk.Design:
    """A stage on a divider: its trips are shares of V_CC, 2.619 V and 2.381 V at 5 V."""
    given: dict[str, Any] = {"supply": 5.0, **changes}
    parts = given.pop("parts", {"R_T": "10k", "R_B": "10k", "R_F": "100k"})
    return hk.Design(given.pop("stage", hk.Stage("inverting")), parts, **given)


def only(design: hk.Design, name: str, **choices: Any) -> hk.Finding:
    (finding,) = [f for f in hk.review(design, **choices) if f.name == name]
    return finding


def judged(finding: hk.Finding, severity: str, margin: float) -> None:
    assert finding.severity == severity
    assert finding.margin == pytest.approx(margin)


def loose(tol: float) -> dict[str, hk.Part]:
    return {"R_R": hk.Part("10k", tol=tol), "R_F": hk.Part("90k", tol=tol)}


# -- trips -----------------------------------------------------------------------------------


def gap_by_oracle(design: hk.Design) -> float:
    """Lowest upper less highest lower trip over all combinations of the parts' limits."""
    ends = [(p.value * (1 - p.tol), p.value * (1 + p.tol)) for p in design.parts.values()]
    columns = np.array(list(product(*ends))).T
    values = {**design.values, **dict(zip(design.parts, columns, strict=True))}
    trips = [nodal.trip(design.elements, design.stage.output, s, values) for s in ("high", "low")]
    return float(trips[0].min() - trips[1].max())


@pytest.mark.parametrize(("tol", "severity"), [(0.01, "pass"), (0.1, "pass"), (0.7, "warning")])
def test_order_over_tolerances(tol: float, severity: str) -> None:
    design = plain(parts=loose(tol), levels={"V_REF": hk.Part(2.5)})
    if severity == "warning":
        design = design.with_levels(V_REF=hk.Part(2.5, tol=0.2))
    found = only(design, "order")
    assert found.severity == severity
    if severity == "pass":
        assert found.margin == pytest.approx(gap_by_oracle(design))
        assert found.margin > 0
        assert not found.remedy
    else:
        # 20 % of 2.5 V moves both trips by at least nine tenths of it, the parts apart.
        assert found.margin < -0.3
        assert "tighter tolerances" in found.remedy
    assert found.unit == "V"


def test_order_leaves_out_a_supply_that_the_sensor_shares() -> None:
    shared = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(0, 60))
    parts = {
        name: hk.Part(value, tol=0.001)
        for name, value in {"R_T": "10k", "R_B": "10k", "R_F": "100k"}.items()
    }
    steady = divided(parts=parts, signal=shared)
    loose = steady.with_supply(tol=0.2)
    assert only(loose, "order").severity == "pass"
    assert only(loose, "order").margin == pytest.approx(only(steady, "order").margin)
    assert only(loose.with_signal(None), "order").severity == "warning"


def test_order_where_some_combination_does_not_switch() -> None:
    limits = {"drop_high": (0.0, 3.0), "drop_low": (0.0, 3.0)}
    found = only(plain(device=hk.Device(limits=limits)), "order")
    assert found.severity == "fault"
    assert math.isnan(found.margin)


def test_order_without_tolerances_is_a_note() -> None:
    assert only(plain(), "order").severity == "note"


@pytest.mark.parametrize(
    ("offset", "severity"),
    [(0.005, "pass"), (0.05, "pass"), (-0.06, "warning"), (0.49, "warning"), (0.6, "fault")],
)
def test_offset_against_the_width(offset: float, severity: str) -> None:
    low, high = sorted((0.0, offset))
    for design in (device(offset=offset), device(limits={"offset": (low, high)})):
        found = only(design, "offset")
        # The signal drives the minus pin itself: an offset moves both trips by its own size.
        assert found.margin == pytest.approx(0.05 - abs(offset), abs=1e-9)
        if abs(offset) != 0.05:
            assert found.severity == severity


def test_offset_not_stated_is_a_note() -> None:
    assert only(plain(), "offset").severity == "note"


SERIES = stage().with_options("R_S")
WITH_R_S = {"R_R": "10k", "R_F": "90k", "R_S": "4k"}


@pytest.mark.parametrize(
    ("plus", "minus", "move", "severity"),
    [
        # 9 kΩ at plus lowers the trips, 4 kΩ at minus raises them; each current at either limit.
        ((0, 1e-6), (0, 0), 9e-3, "pass"),
        ((-1e-6, 1e-6), (-1e-6, 1e-6), 13e-3, "pass"),
        ((0, 1e-6), (0, 1e-6), 9e-3, "pass"),
        ((0, 0), (-2e-6, 1e-6), 8e-3, "pass"),
        ((0, 10e-6), (0, 10e-6), 90e-3, "warning"),
        ((-40e-6, 40e-6), (-40e-6, 40e-6), 520e-3, "fault"),
    ],
)
def test_bias_against_the_width(
    plus: tuple[float, float], minus: tuple[float, float], move: float, severity: str
) -> None:
    limits = {"bias_plus": plus, "bias_minus": minus}
    found = only(plain(stage=SERIES, parts=WITH_R_S, device=hk.Device(limits=limits)), "bias")
    assert found.margin == pytest.approx(0.05 - move)
    assert found.severity == severity
    assert "9 kΩ (plus)" in found.text
    assert "4 kΩ (minus)" in found.text


def test_bias_by_typical_values_and_not_stated() -> None:
    both = plain(stage=SERIES, parts=WITH_R_S, device=hk.Device(bias_plus=1e-6, bias_minus=1e-6))
    # Currents that are known cancel in part.
    assert only(both, "bias").margin == pytest.approx(0.05 - 5e-3)
    assert only(plain(), "bias").severity == "note"


@pytest.mark.parametrize(("tol", "severity"), [(0.0, "note"), (0.05, "pass"), (0.2, "warning")])
def test_supply_against_the_width(tol: float, severity: str) -> None:
    found = only(plain(supply=hk.Supply(5.0, tol=tol)), "supply")
    assert found.severity == severity
    # The upper trip rises by a tenth of the supply.
    assert "100 mV per volt of V_CC" in found.text
    if tol:
        assert found.margin == pytest.approx(0.05 - 0.1 * 5 * tol)


def test_supply_that_moves_the_trips_by_more_than_the_width() -> None:
    found = only(divided(supply=hk.Supply(5.0, tol="10 %")), "supply")
    width, upper = 5 / 21, 5 * 11 / 21
    assert found.severity == "fault"
    assert found.margin == pytest.approx(0.1 * width - 0.1 * upper)


def test_a_sensor_on_the_same_supply_clears_it() -> None:
    signal = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(-20, 60))
    found = only(divided(supply=hk.Supply(5.0, tol="10 %"), signal=signal), "supply")
    assert found.severity == "pass"
    assert found.margin == pytest.approx(0.1 * 5 / 21)
    own = S.SensorDivider(S.Ntc("10k", 3950), "10k", excitation=5.0, span=(-20, 60))
    assert (
        only(divided(supply=hk.Supply(5.0, tol="10 %"), signal=own), "supply").severity == "fault"
    )


def test_both_rails_of_a_split_supply_count() -> None:
    design = hk.Design(
        hk.Stage("inverting", supply="split", reference="divider"),
        {"R_T": "10k", "R_B": "10k", "R_F": "10k"},
        supply=hk.Supply(12, -6, tol=0.1),
    )
    # Weights of a third each: with high output two thirds V_CC and one third V_EE.
    width = 18 / 3
    assert only(design, "supply").margin == pytest.approx(0.1 * width - (2 * 1.2 + 0.6) / 3)


# -- device ----------------------------------------------------------------------------------


def ranged(low: float | None, high: float | None, **changes: Any) -> hk.Design:
    return plain(device=hk.Device(common_mode_low=low, common_mode_high=high), **changes)


def test_common_mode_at_the_trips() -> None:
    assert only(plain(), "common mode").severity == "note"
    assert only(ranged(0.0, None), "common mode").severity == "note"
    fine = only(ranged(0.0, 1.5), "common mode")
    judged(fine, "pass", 3.5 - 2.75)
    high = only(ranged(0.0, 2.5), "common mode")
    judged(high, "fault", -0.25)
    low = only(ranged(2.4, 0.0), "common mode")
    judged(low, "fault", -0.15)
    assert "wider input range" in low.remedy


def test_common_mode_is_judged_at_the_lowest_supply() -> None:
    nominal = ranged(0.0, 2.0)
    assert only(nominal, "common mode").margin == pytest.approx(0.25)
    drooping = nominal.with_supply(tol="10 %")
    assert only(drooping, "common mode").margin < 0
    assert "to 2.5 V at the lowest supply" in only(drooping, "common mode").text


def test_common_mode_over_the_span_of_the_signal() -> None:
    # Good at the trips, but not where the signal goes: the comparator does not have to be right.
    found = only(ranged(0.0, 1.5, signal=LEVEL), "common mode")
    judged(found, "warning", -1.5)
    narrow = S.Linear(1.0, span=(1, 3.25))
    assert only(ranged(0.0, 1.5, signal=narrow), "common mode").severity == "pass"


def test_far_below_the_negative_rail_the_output_may_turn_over() -> None:
    below = only(ranged(0.0, 0.0, signal=S.Linear(1.0, span=(-0.4, 5))), "common mode")
    assert below.severity == "fault"
    assert "beyond the negative rail" in below.text
    just = only(ranged(0.0, 0.0, signal=S.Linear(1.0, span=(-0.2, 5))), "common mode")
    assert just.severity == "warning"


@pytest.mark.parametrize(("name", "field"), [("output high", "source"), ("output low", "sink")])
def test_output_current_of_a_push_pull_output(name: str, field: str) -> None:
    # In each state 2.5 V across 100 kΩ.
    assert only(plain(), name).severity == "note"
    fine = only(device(**{f"{field}_current": 1e-3}), name)
    judged(fine, "pass", 1e-3 - 25e-6)
    weak = only(device(**{f"{field}_current": 20e-6}), name)
    judged(weak, "fault", -5e-6)
    assert weak.unit == "A"


def test_output_current_of_an_open_collector() -> None:
    collector = hk.Stage("inverting", output="open-collector")
    design = divided(
        stage=collector,
        parts={"R_T": "10k", "R_B": "10k", "R_F": "100k", "R_PU": "1k"},
        device=hk.Device(sink_current=4e-3),
    )
    found = only(design, "output low")
    known = nodal.unknowns(collector.elements, "open-collector", "low", design.values, 3.0)
    assert found.severity == "fault"
    assert found.margin == pytest.approx(4e-3 + float(known["drive"][0]))
    assert "output high" not in hk.review(design).names
    assert only(design.with_parts(R_PU="10k"), "output low").severity == "pass"


def test_loading_of_the_high_level() -> None:
    assert only(plain(), "loading").severity == "pass"
    assert only(plain(), "loading").margin == pytest.approx(0.5)
    loaded = plain(
        stage=stage().with_options("R_L"),
        parts={"R_R": "10k", "R_F": "90k", "R_L": "1k"},
        device=hk.Device(r_high=300),
    )
    known = nodal.unknowns(loaded.elements, "push-pull", "high", loaded.values, 2.0)
    found = only(loaded, "loading")
    assert found.severity == "warning"
    assert found.margin == pytest.approx(0.5 - (5 - float(known["out"][0])))
    assert only(loaded.with_parts(R_L="100k"), "loading").severity == "pass"


def test_loading_of_a_pull_up() -> None:
    design = divided(
        stage=hk.Stage("inverting", output="open-collector"),
        parts={"R_T": "10k", "R_B": "10k", "R_F": "22k", "R_PU": "10k"},
    )
    assert only(design, "loading").severity == "warning"
    assert only(design.with_parts(R_PU="1k"), "loading").severity == "pass"


@pytest.mark.parametrize(
    ("gain", "severity"), [(None, "note"), (1e5, "pass"), (50, "warning"), (5, "fault")]
)
def test_loop_gain(gain: float | None, severity: str) -> None:
    found = only(device(gain=gain), "loop gain")
    assert found.severity == severity
    assert "0.1 of the output" in found.text
    if gain is not None:
        assert found.margin == pytest.approx(0.1 * gain - 1)


# -- what surrounds the stage ----------------------------------------------------------------


@pytest.mark.parametrize(
    ("span", "severity", "margin"),
    [((0, 5), "pass", 2.25), ((2.0, 3.0), "pass", 0.25), ((0, 2.5), "fault", -0.25)],
)
def test_reach_of_the_signal(span: tuple[float, float], severity: str, margin: float) -> None:
    found = only(plain(signal=S.Linear(1.0, span=span)), "reach")
    judged(found, severity, margin)


def test_reach_of_a_signal_that_is_not_known() -> None:
    assert only(plain(), "reach").severity == "note"

    class Broken(S.Linear):
        def _volts(self, quantity: Any, values: Any) -> Any:
            return math.nan * quantity

    found = hk.review(plain(signal=Broken(1.0, span=(0, 1))))
    assert found["reach"].severity == "warning"
    assert not re.search(r"\bnan\b", str(found))


VENT = S.SensorDivider(S.Ntc("10k", 3950), "10k", "bottom", span=(-20, 60))


@pytest.mark.parametrize(
    ("where", "safe", "load", "opened", "shorted"),
    [
        # Sensor at the bottom: open reads 5 V, which an inverting stage answers with low.
        ("bottom", "off", "high", "pass", "fault"),
        ("bottom", "on", "high", "fault", "pass"),
        ("bottom", "on", "low", "pass", "fault"),
        ("top", "off", "high", "fault", "pass"),
        ("bottom", None, "high", "note", "note"),
    ],
)
def test_sensor_faults_against_the_safe_state(
    where: str, safe: str | None, load: str, opened: str, shorted: str
) -> None:
    design = divided(signal=S.SensorDivider(VENT.sensor, "10k", where, span=(-20, 60)))
    found = hk.review(design, safe=safe, load=load)
    assert (found["sensor open"].severity, found["sensor short"].severity) == (opened, shorted)


def test_a_non_inverting_stage_answers_the_other_way() -> None:
    design = hk.Design(
        hk.Stage("non-inverting", reference="source"),
        {"R_I": "10k", "R_F": "100k"},
        supply=5.0,
        levels={"V_REF": 2.5},
        signal=VENT,
    )
    found = hk.review(design, safe="on")
    assert (found["sensor open"].severity, found["sensor short"].severity) == ("pass", "fault")


def test_sensor_readings_inside_the_band_or_not_known() -> None:
    driven = S.DrivenSensor(S.Rtd(1000), "1 mA", compliance="2.5 V", span=(0, 850))
    found = hk.review(plain(signal=driven), safe="off")
    assert found["sensor open"].severity == "warning"
    assert "inside the band" in found["sensor open"].text
    unknown = hk.review(plain(signal=LEVEL), safe="off")
    assert unknown["sensor open"].severity == unknown["sensor short"].severity == "note"
    assert "sensor open" not in hk.review(plain()).names


def test_start_up() -> None:
    assert only(plain(), "start-up").severity == "note"
    assert only(plain(), "start-up", start="high").severity == "pass"
    assert only(plain(), "start-up", start="high", safe="on").severity == "pass"
    wrong = only(plain(), "start-up", start="high", safe="off")
    assert wrong.severity == "warning"
    assert "load on" in wrong.text
    assert only(plain(), "start-up", start="high", safe="off", load="low").severity == "pass"


# -- the review ------------------------------------------------------------------------------


def everything_stated() -> hk.Design:
    return plain(
        parts=loose(0.01),
        supply=hk.Supply(5.0, tol="2 %"),
        device=hk.Device(
            limits={"offset": (-2e-3, 2e-3), "bias_plus": (0, 1e-7)},
            common_mode_low=0.0,
            common_mode_high=1.0,
            gain=1e5,
            source_current=1e-2,
            sink_current=1e-2,
        ),
        signal=S.CurrentLoop(150, span=(0, 4), unit="m", loop_limit="25 mA"),
    )


def test_a_design_with_everything_in_order_passes_everything() -> None:
    found = hk.review(everything_stated(), safe="on", start="high")
    odd = {f.name: f.severity for f in found if f.severity != "pass"}
    # A loop that is open reads 0 V and a shorted one the highest: one of them is never safe.
    assert odd == {"sensor short": "fault"}
    assert {f.name for f in found} == {
        "order", "offset", "bias", "supply", "common mode", "output high", "output low",
        "loading", "loop gain", "reach", "source resistance", "sensor open", "sensor short",
            "start-up",
    }  # fmt: skip
    assert all(not f.remedy for f in found if f.severity == "pass")


def test_findings_come_worst_first() -> None:
    found = hk.review(everything_stated().with_device(gain=5, source_current=None), safe="on")
    ranks = [list(SIGNS).index(f.severity) for f in found]
    assert ranks == sorted(ranks)
    assert len(found) == len(list(found)) == len(ranks)
    assert found.worst == "fault"
    assert found.count("fault") == 2
    assert sum(found.count(severity) for severity in SIGNS) == len(found)


def test_a_finding_is_had_by_its_name() -> None:
    found = hk.review(plain())
    assert isinstance(found, hk.Review)
    assert isinstance(found["order"], hk.Finding)
    with pytest.raises(hk.UnknownNameError) as caught:
        found["comon mode"]
    assert "try     common mode" in str(caught.value)


def test_an_empty_review_is_no_fault() -> None:
    assert hk.Review(()).worst == "pass"


def test_a_design_that_cannot_switch() -> None:
    # The leakage pulls the high level far below the low one.
    found = hk.review(
        divided(
            stage=hk.Stage("inverting", output="open-collector"),
            parts={"R_T": "10k", "R_B": "10k", "R_F": "100k", "R_PU": "10k"},
            device=hk.Device(leakage=10e-3),
        )
    )
    (finding,) = found
    assert (finding.name, finding.severity, found.worst) == ("order", "fault", "fault")
    assert "no trip points" in finding.text
    assert finding.remedy


def test_unknown_choices_are_named_together() -> None:
    with pytest.raises(hk.UnknownNameError) as caught:
        hk.review(plain(), load="hi", safe="of", start="On")
    assert len(caught.value.faults) == 3
    text = str(caught.value)
    for part in ("choice for load 'hi'", "choice for safe 'of'", "choice for start 'On'", "off"):
        assert part in text


def test_every_view_shows_sign_text_margin_and_remedy() -> None:
    found = hk.review(device(gain=5))
    for view in (found.to_text(), found._repr_html_(), found.to_latex()):
        assert "loop gain 0.5" in view
        assert "a smaller R\\_F" in view or "a smaller R_F" in view
    assert "✗ loop gain" in found.to_text()
    assert "margin -0.5" in found.to_text() or "margin -500 m" in found.to_text()


@settings(max_examples=40)
@given(
    designs(),
    st.sampled_from(("high", "low")),
    st.sampled_from((None, "on", "off")),
    st.sampled_from((None, "high", "low")),
)
def test_any_design_is_reviewed_in_plain_words(
    design: hk.Design, load: str, safe: str | None, start: str | None
) -> None:
    found = hk.review(design, load=load, safe=safe, start=start)
    assert len(found) >= 1
    assert not re.search(r"\b(nan|inf)\b|nan%", str(found).replace(design.name or "\0", ""))
    for finding in found:
        assert finding.severity in SIGNS
        assert finding.text
        assert finding.remedy or finding.severity in ("pass", "note")
        if finding.severity == "pass" and not math.isnan(finding.margin):
            assert finding.margin >= 0
        if finding.severity == "fault" and not math.isnan(finding.margin):
            assert finding.margin <= 0
