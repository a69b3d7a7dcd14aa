"""The sizing search finds what visiting every combination finds."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
import pytest

import hystkit as hk
from hystkit.analyses.sizing.ranking import COMPARED
from tests.analyses import exhaustive

REAL = hk.Device(
    drop_high=0.1, drop_low=0.15, r_high=40.0, r_low=60.0, leakage=2e-7, offset=1e-3,
    bias_plus=4e-8, bias_minus=-3e-8,
)  # fmt: skip


class Form(NamedTuple):
    stage: hk.Stage
    free: tuple[str, ...]
    fixed: dict[str, Any]
    supply: hk.Supply
    levels: dict[str, Any]
    device: hk.Device | None = None

    def template(self, tol: float = 0.0) -> hk.Design:
        free = {name: hk.Part(1e4, tol) for name in self.free}
        return hk.Design(self.stage, {**self.fixed, **free}, supply=self.supply,
                         levels=self.levels, device=self.device)  # fmt: skip

    def size(self, **wanted: Any) -> Any:
        return hk.size(self.stage, supply=self.supply, levels=self.levels, device=self.device,
                       free=self.free, parts=self.fixed, **wanted)  # fmt: skip


SINGLE, SPLIT = hk.Supply(5.0), hk.Supply(12.0, -12.0)
FORMS = {
    "inverting divider": Form(
        hk.Stage("inverting"), ("R_T", "R_B", "R_F"), {}, SINGLE, {}
    ),
    "inverting divider, real device": Form(
        hk.Stage("inverting"), ("R_T", "R_B", "R_F"), {"R_S": "10k"}, SINGLE, {}, REAL
    ),
    "inverting divider, open collector": Form(
        hk.Stage("inverting", output="open-collector"), ("R_T", "R_B", "R_F"), {"R_PU": "4k7"},
        SINGLE, {}, REAL,
    ),
    "inverting source, open collector": Form(
        hk.Stage("inverting", reference="source", output="open-collector"), ("R_R", "R_F", "R_PU"),
        {}, SINGLE, {"V_REF": 2.2, "V_PU": 9.0},
    ),
    "non-inverting source with a shunt": Form(
        hk.Stage("non-inverting", reference="source", including="R_G"), ("R_I", "R_G", "R_F"), {},
        SINGLE, {"V_REF": 1.25},
    ),
    "non-inverting divider": Form(
        hk.Stage("non-inverting"), ("R_T", "R_I", "R_F"), {"R_B": "33k"}, SINGLE, {}, REAL
    ),
    "inverting ground with a load": Form(
        hk.Stage("inverting", supply="split", reference="ground", including="R_L"),
        ("R_B", "R_F", "R_L"), {}, SPLIT, {"V_L": 0.7}, REAL,
    ),
    "inverting divider, split supply": Form(
        hk.Stage("inverting", supply="split"), ("R_T", "R_B", "R_F"), {}, SPLIT, {},
        hk.Device(drop_high=1.5, drop_low=0.5),
    ),
    "own circuit": Form(
        hk.Stage.custom(
            [hk.Resistor("R_1", "cc", "mid"), hk.Resistor("R_2", "mid", "ground"),
             hk.Resistor("R_3", "mid", "plus"), hk.Resistor("R_4", "out", "plus"),
             hk.Wire("signal", "minus")]
        ),
        ("R_1", "R_2", "R_4"), {"R_3": "15k"}, SINGLE, {},
    ),
}  # fmt: skip


def targets(form: Form, points: dict[str, Any], count: int, seed: int) -> list[tuple[float, float]]:
    """Trips that the form can reach somewhere within its grid, moved off the grid."""
    rng = np.random.default_rng(seed)
    trips = hk.trip_points(form.template(), **points)
    possible = np.flatnonzero(trips.ok)
    found = []
    for place in rng.choice(possible, count):
        upper, lower = float(trips.upper[place]), float(trips.lower[place])
        inwards = 0.2 * (upper - lower) * rng.random(2)
        found.append((upper - inwards[0], lower + inwards[1]))
    return found


@pytest.mark.parametrize("series", ["E12", "E24"])
@pytest.mark.parametrize("name", FORMS)
def test_ten_best_are_those_of_all_combinations(name: str, series: str) -> None:
    form = FORMS[name]
    ranges = (1e3, 1e6) if series == "E12" else (3e3, 3e5)
    points = exhaustive.grid(form.free, series, ranges)
    for upper, lower in targets(form, points, 4, seed=len(name)):
        found = form.size(upper=upper, lower=lower, series=series, ranges=ranges, suggest=False)
        errors = exhaustive.nominal_errors(form.template(), points, upper, lower)
        best = np.sort(errors)[:10]
        assert [c.error for c in found] == pytest.approx(best, rel=1e-9, abs=1e-12)
        assert found.searched == errors.size
        for candidate in found:
            trips = hk.trip_points(candidate.design)
            off = max(abs(trips.upper - upper), abs(trips.lower - lower))
            assert candidate.error == pytest.approx(off, rel=1e-12)


@pytest.mark.parametrize(
    ("name", "half"),
    [("inverting divider", 0.1), ("inverting divider, open collector", 0.05),
     ("non-inverting source with a shunt", 0.2), ("inverting ground with a load", 0.3),
     ("own circuit", 0.1)],
)  # fmt: skip
def test_best_over_all_tolerances(name: str, half: float) -> None:
    form = FORMS[name]
    form = form._replace(supply=hk.Supply(form.supply.v_cc, form.supply.v_ee, tol=0.02))
    points = exhaustive.grid(form.free, "E12", (3e3, 3e5))
    for upper, lower in targets(form, points, 2, seed=3):
        windows = {"upper": (upper - half, upper + half), "lower": (lower - half, lower + 2 * half)}
        found = form.size(**windows, series="E12", ranges=(3e3, 3e5), tol=0.02, suggest=False,
                          count=COMPARED)  # fmt: skip
        errors = exhaustive.worst_errors(form.template(0.02), points, **windows)
        best = np.sort(errors)[:COMPARED]
        assert sorted(c.worst_error for c in found) == pytest.approx(best, rel=1e-9)
        assert [c.holds for c in found] == [*(best <= 1)]
        assert [c.worst_error for c in found if c.holds] == pytest.approx(best[best <= 1], rel=1e-9)


@pytest.mark.parametrize("name", ["inverting divider, open collector", "non-inverting divider"])
@pytest.mark.parametrize(
    "shares",
    [{"supply_current": 0.02}, {"input_resistance": 0.05}, {"output_current": 0.01},
     {"supply_current": 0.3, "input_resistance": 0.4, "output_current": 0.3}],
)  # fmt: skip
def test_ten_best_within_limits(name: str, shares: dict[str, float]) -> None:
    form = FORMS[name]
    points = exhaustive.grid(form.free, "E12", (1e3, 1e6))
    loads = exhaustive.loads(form.template(), points)
    limits = {n: float(np.quantile(loads[n], share)) for n, share in shares.items()}
    kept = np.all([loads[n] <= most for n, most in limits.items()], axis=0)
    assert 10 < kept.sum() < 0.2 * kept.size
    for upper, lower in targets(form, points, 3, seed=5):
        found = form.size(upper=upper, lower=lower, series="E12", limits=limits, suggest=False)
        errors = exhaustive.nominal_errors(form.template(), points, upper, lower)
        assert [c.error for c in found] == pytest.approx(np.sort(errors[kept])[:10], rel=1e-9)
        for candidate in found:
            at = exhaustive.loads(candidate.design, {})
            assert all(at[n] <= most * (1 + 1e-12) for n, most in limits.items())


def test_limits_that_no_combination_keeps_leave_nothing() -> None:
    form = FORMS["inverting divider"]
    loads = exhaustive.loads(form.template(), exhaustive.grid(form.free, "E96", (1e5, 1e6)))
    least = float(loads["supply_current"].min())
    for share, empty in ((0.999, True), (1.001, False)):
        found = form.size(upper=2.7, lower=2.3, ranges=(1e5, 1e6), suggest=False,
                          limits={"supply_current": share * least})  # fmt: skip
        assert (len(found) == 0) is empty


def test_limits_hold_together_though_each_alone_has_room() -> None:
    form = FORMS["inverting divider"]
    points = exhaustive.grid(form.free, "E12", (1e3, 1e6))
    loads = exhaustive.loads(form.template(), points)
    limits = {"supply_current": 2e-5, "input_resistance": 2e4}
    kept = [loads[name] <= most for name, most in limits.items()]
    assert all(one.any() for one in kept)
    found = form.size(upper=2.7, lower=2.3, series="E12", limits=limits, suggest=False)
    both = np.logical_and(*kept)
    assert len(found) == min(10, both.sum())


def test_signal_at_both_inputs_is_searched_point_by_point() -> None:
    # The denominator has a zero within the grid, so that nothing may be inferred from corners.
    stage = hk.Stage.custom(
        [hk.Resistor("R_1", "signal", "plus"), hk.Resistor("R_2", "plus", "ground"),
         hk.Resistor("R_3", "out", "plus"), hk.Resistor("R_4", "signal", "minus"),
         hk.Resistor("R_5", "minus", "cc")],
        sense="inverting",
    )  # fmt: skip
    form = Form(stage, ("R_1", "R_3", "R_5"), {"R_2": "22k", "R_4": "47k"}, SINGLE, {})
    points = exhaustive.grid(form.free, "E12", (3e3, 3e5))
    trips = hk.trip_points(form.template(), **points)
    assert 0 < np.count_nonzero(trips.ok) < trips.status.size
    for upper, lower in targets(form, points, 3, seed=11):
        found = form.size(upper=upper, lower=lower, series="E12", ranges=(3e3, 3e5), suggest=False)
        errors = exhaustive.nominal_errors(form.template(), points, upper, lower)
        assert [c.error for c in found] == pytest.approx(np.sort(errors)[:10], rel=1e-9, abs=1e-12)


def test_a_part_that_does_not_matter_brings_all_of_its_values() -> None:
    # Without bias current the source resistance has no effect: 13 values tie for each ratio.
    form = Form(hk.Stage("inverting", including="R_S"), ("R_S", "R_B", "R_F"), {"R_T": "100k"},
                SINGLE, {})  # fmt: skip
    found = form.size(upper=2.7, lower=2.3, series="E12", ranges=(1e5, 1e6), count=13)
    assert len({c.error for c in found}) == 1
    assert len({c.design.parts["R_S"].value for c in found}) == 13


def test_equal_errors_are_ranked_by_customary_size() -> None:
    found = FORMS["inverting divider"].size(upper=2.7, lower=2.3, series="E24", count=3)
    sizes = [c.design.parts["R_T"].value for c in found[:2]]
    assert found[0].error == pytest.approx(found[1].error, abs=1e-12)
    assert abs(np.log(sizes[0] / 3e4)) < abs(np.log(sizes[1] / 3e4))


def test_the_same_request_gives_the_same_answer() -> None:
    form = FORMS["inverting divider, open collector"]
    windows: Any = {"upper": (2.6, 2.8), "lower": (2.2, 2.4)}
    one, other = (form.size(**windows, series="E24") for _ in range(2))
    assert one.to_text() == other.to_text()
    assert [c.design for c in one] == [c.design for c in other]


def test_four_free_parts() -> None:
    form = Form(hk.Stage("inverting", output="open-collector"), ("R_T", "R_B", "R_F", "R_PU"), {},
                SINGLE, {}, REAL)  # fmt: skip
    points = exhaustive.grid(form.free, "E12", (1e3, 1e5))
    for upper, lower in targets(form, points, 2, seed=17):
        found = form.size(upper=upper, lower=lower, series="E12", ranges=(1e3, 1e5), suggest=False)
        errors = exhaustive.nominal_errors(form.template(), points, upper, lower)
        assert [c.error for c in found] == pytest.approx(np.sort(errors)[:10], rel=1e-9, abs=1e-12)


@pytest.mark.parametrize("seed", range(40))
def test_any_request_finds_what_all_combinations_hold(seed: int) -> None:
    rng = np.random.default_rng(seed)
    form, request = drawn(rng)
    points = exhaustive.grid(form.free, "E12", (1e3, 1e5))
    template = form.template(0.02)
    ((upper, lower),) = targets(form, points, 1, seed)
    loads = exhaustive.loads(template, points)
    limits = {
        name: most
        for name, values in loads.items()
        if rng.random() < 0.3 and (most := float(np.nanquantile(values, 0.5))) > 0
    }
    kept = np.all([loads[n] <= most for n, most in limits.items()] or [np.True_], axis=0)
    half = float(rng.uniform(0.02, 0.3))
    windows = {"upper": (upper - half, upper + half), "lower": (lower - half, lower + half)}
    if request == "windows":
        found = form.size(**windows, series="E12", ranges=(1e3, 1e5), tol=0.02, limits=limits,
                          suggest=False, count=COMPARED)  # fmt: skip
        errors = exhaustive.worst_errors(template, points, **windows)
    else:
        found = form.size(upper=upper, lower=lower, series="E12", ranges=(1e3, 1e5), limits=limits,
                          suggest=False, count=COMPARED)  # fmt: skip
        errors = exhaustive.nominal_errors(template, points, upper, lower)
    errors = np.where(kept, errors, np.inf)
    # Where a window is left the order is another one.
    got = sorted(c.worst_error if request == "windows" else c.error for c in found)
    expected = np.sort(errors[np.isfinite(errors)])[:COMPARED]
    assert got == pytest.approx(expected, rel=1e-8, abs=1e-11)


def drawn(rng: np.random.Generator) -> tuple[Form, str]:
    """A form with values at which parts act in different directions over the grid."""
    while True:
        stage = hk.Stage.all()[rng.integers(20)]
        if stage.sense == "non-inverting" and rng.random() < 0.4:
            stage = stage.with_options("R_G")
        free = tuple(str(n) for n in rng.permutation(stage.parts)[:3])
        fixed = {n: hk.Part(10 ** rng.uniform(3.3, 5.5), tol=rng.choice([0, 0.05]))
                 for n in stage.parts if n not in free}  # fmt: skip
        rails = (5.0, None) if stage.supply == "single" else (12.0, -9.0)
        levels: dict[str, Any] = {}
        if stage.reference == "source":
            levels["V_REF"] = hk.Part(rng.uniform(0.5, 4.5), tol=0.01)
        if rng.random() < 0.4:
            level = "V_OH" if stage.output == "push-pull" else "V_PU"
            levels[level] = rng.uniform(3, 10)
        device = hk.Device(
            drop_high=rng.uniform(0, 1.5), drop_low=rng.uniform(0, 0.5), r_high=rng.uniform(0, 300),
            r_low=rng.uniform(0, 300), leakage=rng.uniform(0, 1e-5), offset=rng.normal(0, 5e-3),
            bias_plus=rng.normal(0, 2e-6), bias_minus=rng.normal(0, 1e-6),
            limits={"offset": (-0.05, 0.05)},
        )  # fmt: skip
        form = Form(
            stage, free, fixed, hk.Supply(*rails, tol=rng.choice([0, 0.03])), levels, device
        )
        points = exhaustive.grid(free, "E12", (1e3, 1e5))
        if np.any(hk.trip_points(form.template(), **points).ok):
            return form, str(rng.choice(["windows", "numbers"]))
