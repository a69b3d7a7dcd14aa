"""Monte Carlo: the sequence, the distributions, failures and yield."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

import hystkit as hk
from hystkit.base.frozen import Named
from hystkit.numeric.sampling import Plan, blocks, values
from hystkit.numeric.uncertain import Box, Quantity
from hystkit.numeric.yields import yield_of
from tests.analyses.spread_designs import full, uncertain_design


def plan(distribution: str = "normal", count: int = 4096, seed: int = 0) -> Plan:
    return Plan(count, seed, distribution, 3.0)


def test_the_points_are_those_of_the_scrambled_sequence() -> None:
    names = "abcde"
    box = Box(Named({name: Quantity(name, 0.5, 0.0, 1.0, "V") for name in names}))
    count = 40_000  # several blocks, the last one not full
    drawn = [np.stack([*rows.values()]) for _, rows in blocks(box, plan("uniform", count, 7))]
    found = np.concatenate(drawn, axis=1)[:, :count]
    engine = stats.qmc.Sobol(len(names), scramble=True, seed=np.random.default_rng(7))
    expected = engine.random(65536)[:count].T
    assert np.abs(found - expected).max() <= 0.5 / 16384


def test_normal_is_truncated_at_the_ends() -> None:
    quantity = Quantity("R_F", 100.0, 94.0, 106.0, "Ω")
    found = values(quantity, plan())
    expected = stats.truncnorm(-3, 3, loc=100, scale=2)
    assert found.min() > 94
    assert found.max() < 106
    assert found.mean() == pytest.approx(100, abs=1e-9)
    assert found.std() == pytest.approx(expected.std(), rel=1e-5)
    assert stats.kstest(found, expected.cdf).statistic <= 0.5 / found.size + 1e-12


def test_normal_with_unequal_sides_has_half_of_the_samples_on_each() -> None:
    found = values(Quantity("drop_low", 0.2, 0.15, 0.5, "V"), plan())
    assert np.median(found) == pytest.approx(0.2, abs=1e-4)
    assert 0.15 < found.min() < 0.16
    assert 0.45 < found.max() < 0.5


def test_uniform_fills_the_range_alike() -> None:
    found = values(Quantity("drop_low", 0.2, 0.15, 0.5, "V"), plan("uniform"))
    assert stats.kstest(found, stats.uniform(0.15, 0.35).cdf).statistic <= 1 / found.size


def test_binned_parts_avoid_the_inner_half_of_their_tolerance() -> None:
    design = hk.Design(hk.Stage("inverting"), {"R_T": "100k", "R_B": "100k",
                       "R_F": hk.Part("100k", tol=0.1)}, supply=hk.Supply(5, tol=0.1))  # fmt: skip
    box = hk.spread(design).box
    parts = values(box.quantities["R_F"], plan("binned"))
    off = np.abs(parts / 100e3 - 1)
    assert off.min() == pytest.approx(0.05, abs=1e-5)
    assert off.max() == pytest.approx(0.1, abs=1e-5)
    assert np.mean(parts > 100e3) == 0.5
    # A supply is not sorted into bins.
    assert np.abs(values(box.quantities["V_CC"], plan("binned")) - 5).min() < 1e-3


def test_drift_fills_the_hole() -> None:
    design = hk.Design(hk.Stage("inverting"), {"R_T": "100k", "R_B": "100k",
                       "R_F": hk.Part("100k", tol=0.1, tempco=1e-3)}, supply=5.0)  # fmt: skip
    quantity = hk.spread(design, temperature=(-5, 25)).box.quantities["R_F"]
    off = np.abs(values(quantity, plan("binned")) / 100e3 - 1)
    assert off.min() == pytest.approx(0.05 - 30 * 1e-3, abs=1e-3)


def test_same_seed_same_samples() -> None:
    design = uncertain_design(hk.Stage("inverting"))
    one, again, other = (hk.spread(design, samples=1000, seed=seed) for seed in (3, 3, 4))
    assert np.array_equal(one.samples["upper"], again.samples["upper"])
    assert not np.array_equal(one.samples["upper"], other.samples["upper"])


@pytest.mark.parametrize("distribution", ["normal", "uniform", "binned"])
@pytest.mark.parametrize("count", [1, 100, 8192, 20_000])
def test_samples_lie_within_the_extremes(distribution: str, count: int) -> None:
    stage = full(hk.Stage("non-inverting", output="open-collector"))
    found = hk.spread(uncertain_design(stage), samples=count, distribution=distribution)
    for kind, drawn in found.samples.items():
        low, high = found.extremes[kind]
        assert drawn.shape == (count,)
        assert low <= drawn.min()
        assert drawn.max() <= high
    assert np.all(found.samples.status == 0)


def test_trips_of_a_sample_are_those_of_its_values() -> None:
    design = uncertain_design(full(hk.Stage("inverting", output="open-collector")))
    found = hk.spread(design, samples=500)
    ((_, drawn),) = blocks(found.box, found.plan)
    trips = hk.trip_points(design, **{name: row[:500] for name, row in drawn.items()})
    for kind, sampled in found.samples.items():
        assert sampled == pytest.approx(getattr(trips, kind), rel=1e-12)


def test_small_normal_spread_is_what_rss_says() -> None:
    design = uncertain_design(hk.Stage("inverting", output="open-collector"), tol=0.001)
    design = design.with_device(limits={}).with_supply(tol=0.001)
    found = hk.spread(design, samples=1 << 16, sigmas=3)
    truncated = stats.truncnorm(-3, 3).std()
    for kind in ("upper", "lower", "width", "middle"):
        assert found.samples[kind].std() == pytest.approx(found.rss[kind] / 3 * truncated, rel=2e-3)


def test_correlation_of_the_trips_is_kept() -> None:
    found = hk.spread(uncertain_design(hk.Stage("inverting")), samples=1 << 14)
    upper, lower = found.samples["upper"], found.samples["lower"]
    apart = np.sqrt(upper.var() + lower.var())
    assert found.samples["width"].std() < 0.7 * apart


def test_yield_counts_samples_in_all_windows() -> None:
    found = hk.spread(uncertain_design(hk.Stage("inverting")), samples=5000)
    upper, width = found.samples["upper"], found.samples["width"]
    cut = np.median(upper)
    share = found.yield_within(upper=(None, float(cut)), width=(float(np.median(width)), None))
    passed = np.count_nonzero((upper <= cut) & (width >= np.median(width)))
    assert (share.passed, share.samples) == (passed, 5000)
    assert found.yield_within(upper=found.extremes["upper"]).value == 1
    assert found.yield_within(lower=(9.0, 10.0)).value == 0


@pytest.mark.parametrize("passed", [0, 1, 37, 99, 100])
def test_interval_is_that_of_the_binomial_test(passed: int) -> None:
    drawn = {"upper": np.r_[np.zeros(passed), np.ones(100 - passed)]}
    found = yield_of(drawn, {"upper": (None, 0.5)}, confidence=0.9)
    expected = stats.binomtest(passed, 100).proportion_ci(0.9, method="exact")
    assert (found.low, found.high) == pytest.approx((expected.low, expected.high), abs=1e-12)


def test_a_sample_that_cannot_switch_is_a_failure_and_no_crash() -> None:
    stage = hk.Stage("inverting", output="open-collector")
    design = hk.Design(
        stage,
        {"R_T": "46k4", "R_B": "26k7", "R_F": "100k", "R_PU": "4k7"},
        supply=5.0,
        levels={"V_PU": hk.Part(1.0, tol=0.9)},
        device=hk.Device(drop_low=0.7),
    )
    found = hk.spread(design, samples=2048, distribution="uniform")
    failed = np.count_nonzero(found.samples.status)
    assert 0 < failed < 2048
    assert np.count_nonzero(np.isnan(found.samples["upper"])) == failed
    assert found.yield_within().passed == 2048 - failed
    assert found.yield_within(upper=(-10, 10)).passed == 2048 - failed


def test_every_fault_of_the_windows_is_named() -> None:
    found = hk.spread(uncertain_design(hk.Stage("inverting")), samples=16)
    with pytest.raises(hk.InputError) as caught:
        found.yield_within(upper=(3, 2), lower=(1,), width=2.0, confidence=1.5)  # type: ignore[arg-type]
    assert len(caught.value.faults) == 4
    with pytest.raises(hk.UnknownNameError, match="'uper'"):
        found.samples["uper"]
