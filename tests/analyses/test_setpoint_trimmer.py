"""A trimmer over its travel and its tolerance, and the padding resistors for a wanted range."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.preferred import values
from hystkit.numeric.tolerances import toleranced

SCREW = hk.Trimmer("10k", total_tol="10 %", end_resistance=50, turns=25, setting_resolution=5e-4)


def divider(sense: str = "inverting", output: str = "push-pull", tol: float = 0.01) -> hk.Design:
    parts: dict[str, Any] = {"R_T": "47k", "R_B": "39k", "R_F": "470k"}
    parts |= {"R_I": "22k"} if sense == "non-inverting" else {}
    parts |= {"R_PU": "4k7"} if output == "open-collector" else {}
    return hk.Design(
        hk.Stage(sense, output=output),
        {name: hk.Part(value, tol=tol) for name, value in parts.items()},
        supply=hk.Supply(5.0, tol=0.02),
        device=hk.Device(drop_low=0.2, offset=1e-3, bias_plus=2e-8, bias_minus=1e-8,
                         limits={"offset": (-3e-3, 3e-3), "drop_low": (0.1, 0.4)}),
    )  # fmt: skip


def drawn(design: hk.Design, trimmer: hk.Trimmer, place: str, count: int, seed: int) -> Any:
    """Trips at random settings of random units, somewhere inside all tolerances."""
    rng = np.random.default_rng(seed)
    units = {n: rng.uniform(*pair, count) for n, pair in toleranced(design).items()}
    total = trimmer.total * rng.uniform(1 - trimmer.total_tol, 1 + trimmer.total_tol, count)
    end = rng.uniform(0, trimmer.end_resistance, count)
    wiper = end + rng.random(count) * (total - 2 * end)
    if place == "feedback":
        units["R_F"] = units.get("R_F", design.parts["R_F"].value) + wiper
    else:
        units["R_T"] = units.get("R_T", design.parts["R_T"].value) + total - wiper
        units["R_B"] = units.get("R_B", design.parts["R_B"].value) + wiper
    return hk.trip_points(design, **units)


@pytest.mark.parametrize("place", ["divider", "feedback"])
@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
def test_no_unit_leaves_the_possible_range(sense: str, output: str, place: str) -> None:
    design = divider(sense, output)
    trimmer = SCREW if place == "divider" else hk.Trimmer("500k", end_resistance=200)
    found = hk.trim(design, trimmer, place)
    trips = drawn(design, trimmer, place, 100_000, seed=4)
    for kind in found.kinds:
        low, high = found.possible[kind]
        inside = getattr(trips, kind)
        assert low <= inside.min()
        assert inside.max() <= high
        reached = high - low
        assert inside.min() < low + 0.35 * reached
        assert inside.max() > high - 0.35 * reached


@pytest.mark.parametrize("place", ["divider", "feedback"])
@settings(max_examples=30)
@given(data=st.data())
def test_every_unit_reaches_what_is_sure(place: str, data: st.DataObject) -> None:
    design = divider(data.draw(st.sampled_from(["inverting", "non-inverting"])), tol=0.002)
    trimmer = SCREW if place == "divider" else hk.Trimmer("1M", end_resistance=200)
    found = hk.trim(design, trimmer, place)
    unit = {n: data.draw(st.floats(*pair)) for n, pair in toleranced(design).items()}
    total = trimmer.total * data.draw(st.floats(0.9, 1.1))
    ends = []
    for wiper in (trimmer.end_resistance, total - trimmer.end_resistance):
        moved = dict(unit)
        if place == "feedback":
            moved["R_F"] = unit["R_F"] + wiper
        else:
            moved |= {"R_T": unit["R_T"] + total - wiper, "R_B": unit["R_B"] + wiper}
        ends.append(hk.trip_points(design, **moved))
    for kind in found.kinds:
        low, high = sorted(float(getattr(end, kind)) for end in ends)
        sure = found.sure[kind]
        if sure is not None:
            assert low <= sure[0] + 1e-12
            assert sure[1] <= high + 1e-12


def test_stated_values_lie_at_the_ends_of_the_travel() -> None:
    design = divider()
    found = hk.trim(design, SCREW)
    by_hand = [
        hk.trip_points(design, R_T=47e3 + 10e3 - wiper, R_B=39e3 + wiper)
        for wiper in (50.0, 9950.0)
    ]
    for kind in ("upper", "lower"):
        ends = sorted(float(getattr(trips, kind)) for trips in by_hand)
        assert found.nominal[kind] == pytest.approx(tuple(ends), rel=1e-12)
        inner, outer = found.sure[kind], found.possible[kind]
        assert inner is not None
        assert outer[0] < ends[0] < inner[0] < inner[1] < ends[1] < outer[1]


def test_trips_go_one_way_over_the_travel() -> None:
    found = hk.trim(divider("non-inverting", "open-collector"), SCREW)
    trips = found.at(np.linspace(0, 1, 500))
    for kind in ("upper", "lower"):
        assert np.all(np.diff(trips[kind]) > 0)


def test_width_is_told_only_where_it_goes_one_way() -> None:
    assert hk.trim(divider(), SCREW).kinds == ("upper", "lower")
    pushed = hk.trim(divider(), hk.Trimmer("500k"), "feedback")
    assert pushed.kinds == ("upper", "lower", "width")
    pulled = hk.trim(divider(output="open-collector"), hk.Trimmer("500k"), "feedback")
    assert pulled.kinds == ("upper", "lower")
    # In a divider the width does turn on the way: it is largest where both arms are alike.
    middle = hk.trim(divider(tol=0.0), hk.Trimmer("50k"))
    width = middle.at(np.linspace(0, 1, 101))["width"]
    assert width.max() > max(width[0], width[-1])


def test_resolution() -> None:
    found = hk.trim(divider(), SCREW)
    turns = found.at(np.linspace(0, 1, 26))
    for kind in ("upper", "lower"):
        steps = np.diff(turns[kind])
        low, high = found.per_turn[kind]
        assert low <= steps.min() * (1 + 1e-9)
        assert steps.max() <= high * (1 + 1e-9)
        assert high == pytest.approx(steps.max(), rel=0.02)
        # 0.05 % of 10k is 5 Ohm.
        up, down = (
            hk.trip_points(divider(), R_T=47e3 + 5e3 - w, R_B=39e3 + 5e3 + w) for w in (2.5, -2.5)
        )
        middle = float(getattr(up, kind) - getattr(down, kind))
        assert found.resolution[kind][0] * (1 - 1e-9) <= middle <= found.resolution[kind][1]
    assert hk.trim(divider(), hk.Trimmer("10k")).resolution["upper"] == (0.0, 0.0)


def test_what_can_be_reached() -> None:
    found = hk.trim(divider(), SCREW)
    sure, possible = found.sure["upper"], found.possible["upper"]
    assert sure is not None
    inside, between, outside = sum(sure) / 2, (sure[1] + possible[1]) / 2, possible[1] + 0.01
    assert found.reaches(upper=inside) == {"upper": "always"}
    assert found.reaches(upper=sure, lower=found.sure["lower"]) == dict.fromkeys(
        ("upper", "lower"), "always"
    )
    assert found.reaches(upper=between) == {"upper": "not with every unit"}
    assert found.reaches(upper=(inside, between)) == {"upper": "not with every unit"}
    assert found.reaches(upper=outside) == {"upper": "never"}


def test_one_trip_set_leaves_the_other_where_it_says() -> None:
    design = divider()
    found = hk.trim(design, SCREW)
    sure = found.sure["upper"]
    assert sure is not None
    wanted = sum(sure) / 2
    after = found.set_to(upper=wanted)
    assert after.after["upper"] == pytest.approx((wanted, wanted), abs=1e-9)
    assert found.at(after.position)["upper"] == pytest.approx(wanted, abs=1e-4)
    assert after.positions[0] < after.position < after.positions[1]
    # A single unit, set by hand.
    box = toleranced(design)
    unit = {name: pair[name in ("R_T", "V_CC")] for name, pair in box.items()}
    settings_ = np.linspace(0, 1, 200_001)
    wiper = 50 + settings_ * (11e3 - 100)
    unit |= {"R_T": unit["R_T"] + 11e3 - wiper, "R_B": unit["R_B"] + wiper}
    trips = hk.trip_points(design, **unit)
    best = int(np.argmin(abs(trips.upper - wanted)))
    low, high = after.after["lower"]
    assert low - 1e-6 <= trips.lower[best] <= high + 1e-6
    assert "setting" in after.to_text()


@pytest.mark.parametrize(
    ("place", "trimmer", "wanted"),
    [
        ("divider", SCREW, {"upper": (2.3, 2.5)}),
        ("divider", SCREW, {"lower": (1.9, 2.2)}),
        ("feedback", hk.Trimmer("1M", end_resistance=500), {"width": (0.15, 0.4)}),
        ("feedback", hk.Trimmer("2M"), {"upper": (2.45, 2.6)}),
    ],
)
def test_padding_covers_with_every_unit_and_nothing_narrower_does(
    place: str, trimmer: hk.Trimmer, wanted: dict[str, tuple[float, float]]
) -> None:
    ((kind, (low, high)),) = wanted.items()
    found = hk.padding(divider(), trimmer, place, **wanted, series="E12", tol=0.01)
    sure = found.travel.sure[kind]
    assert sure is not None
    assert sure[0] <= low < high <= sure[1]
    span = found.excess + high - low
    names = ("R_F",) if place == "feedback" else ("R_T", "R_B")
    axis = values("E12", max(10.0, trimmer.total / 1e3), min(1e7, trimmer.total * 1e3))
    narrower = []
    for combination in np.stack(np.meshgrid(*[axis] * len(names)), axis=-1).reshape(-1, len(names)):
        parts = {n: hk.Part(float(v), tol=0.01) for n, v in zip(names, combination, strict=True)}
        travel = hk.trim(divider().with_parts(**parts), trimmer, place) if _may(parts) else None
        if travel is None:
            continue
        a, b = travel.nominal[kind]
        if b - a < span * (1 - 1e-9) and a <= low and high <= b:
            other = travel.sure[kind]
            narrower.append(other is not None and other[0] <= low and high <= other[1])
    assert not any(narrower)


def _may(parts: dict[str, hk.Part]) -> bool:
    """Leave out what is far from any use, for the sake of time."""
    return len(parts) == 1 or all(8e3 <= part.value <= 2e5 for part in parts.values())


def test_padding_that_cannot_be_found_names_a_trimmer_that_can() -> None:
    with pytest.raises(hk.InfeasibleError) as caught:
        hk.padding(divider(), hk.Trimmer("10k"), "feedback", width=(0.15, 0.4))
    remedy = caught.value.faults[0].remedy
    assert remedy.startswith("a trimmer of ")
    total = remedy.removeprefix("a trimmer of ").partition(",")[0]
    found = hk.padding(divider(), hk.Trimmer(total), "feedback", width=(0.15, 0.4))
    assert found.travel.reaches(width=(0.15, 0.4)) == {"width": "always"}
    with pytest.raises(hk.InfeasibleError, match="a narrower range"):
        hk.padding(divider(), SCREW, upper=(-3.0, 9.0))


def test_views_name_everything() -> None:
    text = hk.padding(divider(), SCREW, upper=(2.3, 2.5)).to_text()
    for label in (
        "R_T",
        "R_B",
        "upper, wanted",
        "upper, every unit",
        "lower, one turn",
        "one step",
    ):
        assert label in text


@pytest.mark.parametrize(
    ("call", "error", "text"),
    [
        (lambda d: hk.trim(d, SCREW, "wiper"), hk.InputError,
         "there is no such place for a trimmer."),
        (lambda d: hk.trim(hk.as_source(d).exact, SCREW), hk.InputError,
         "a trimmer in the divider needs R_T and R_B."),
        (lambda d: hk.trim(d, SCREW).set_to(upper=4.9), hk.InfeasibleError,
         "not every unit can be set to this upper."),
        (lambda d: hk.trim(d, SCREW).set_to(upper=2.6, lower=2.3), hk.InputError,
         "a trimmer sets one thing."),
        (lambda d: hk.trim(d, SCREW).reaches(width=0.3), hk.InputError,
         "a trimmer in the divider does not set width here."),
        (lambda d: hk.padding(d, SCREW), hk.InputError, "a trimmer covers one range."),
        (lambda d: hk.padding(d, SCREW, upper=(2.6, 2.4)), hk.InputError, "upper is not a range."),
        (lambda d: hk.padding(d, SCREW, width=(0.2, 0.3)), hk.InputError,
         "a trimmer in the divider does not set width here."),
        (lambda d: hk.trim(d.with_parts(R_F="4k7").with_levels(V_OH=12.0), SCREW), hk.DesignError,
         "the divider's node leaves the rails at a trip."),
        (lambda d: hk.trim(divider(output="open-collector").with_device(leakage=1e-3)
                           .with_parts(R_PU="22k"), SCREW), hk.DesignError,
         "the stage does not switch over the whole travel of the trimmer."),
        (lambda d: hk.Trimmer(0), hk.DesignError, "2 faults in this trimmer:"),
        (lambda d: hk.Trimmer("10k", end_resistance="6k"), hk.DesignError,
         "end_resistance of a trimmer is outside its range."),
        (lambda d: hk.Trimmer("10k", turns=0, setting_resolution=-1, total_tol="x"), hk.DesignError,
         "3 faults in this trimmer:"),
    ],
)  # fmt: skip
def test_refusals(call: Any, error: type[Exception], text: str) -> None:
    with pytest.raises(error) as caught:
        call(divider())
    assert str(caught.value).splitlines()[0] == text
