"""First-order spread against another implementation of error propagation and exact differences."""

from __future__ import annotations

from dataclasses import replace
from math import hypot, sqrt

import numpy as np
import pytest
import sympy as sp
from uncertainties import ufloat

import hystkit as hk
from hystkit.numeric.fractions import gains, slopes
from tests.analyses.spread_designs import bridge, full, uncertain_design

KINDS = ("upper", "lower", "width", "middle")
SIGMAS = 3


def propagated(design: hk.Design, found: hk.Spread) -> dict[str, float]:
    """The same root sum squares from the law's text, with numbers that carry their uncertainty."""
    box = found.box.quantities
    numbers = {n: ufloat(q.nominal, q.half / SIGMAS) for n, q in box.items()}
    law = hk.derive(design)
    values = dict(design.values)
    for symbol in values:
        stated = values[symbol]
        for name, number in numbers.items():
            if symbol in (moved := gains(design, name)):
                values[symbol] = values[symbol] + moved[symbol] * (number - number.nominal_value)
        assert getattr(values[symbol], "nominal_value", values[symbol]) == pytest.approx(stated)
    symbols = sorted(law.upper.free_symbols | law.lower.free_symbols, key=str)
    function = sp.lambdify(symbols, (law.upper, law.lower), modules="math")
    upper, lower = function(*(values[s.name] for s in symbols))
    results = (upper, lower, upper - lower, (upper + lower) / 2)
    return {k: SIGMAS * r.std_dev for k, r in zip(KINDS, results, strict=True)}


@pytest.mark.parametrize("stage", [*map(full, hk.Stage.all())], ids=lambda stage: stage.title)
def test_rss_agrees_with_uncertainties(stage: hk.Stage) -> None:
    design = uncertain_design(stage)
    found = hk.spread(design, temperature=(-20, 60), sigmas=SIGMAS)
    assert dict(found.rss) == pytest.approx(propagated(design, found), rel=1e-9)


def test_rss_of_a_bridge_agrees_with_uncertainties() -> None:
    design = bridge(0.02)
    found = hk.spread(design)
    assert dict(found.rss) == pytest.approx(propagated(design, found), rel=1e-9)


@pytest.mark.parametrize("kind", KINDS)
def test_contributions_are_squared_shares_that_sum_to_one(kind: str) -> None:
    design = uncertain_design(full(hk.Stage("inverting", output="open-collector")))
    found = hk.spread(design)
    shares = found.contributions[kind]
    assert sum(shares.values()) == pytest.approx(1, rel=1e-12)
    assert list(shares.values()) == sorted(shares.values(), reverse=True)
    for name in ("R_F", "V_CC", "offset"):
        alone = abs(found.effects[kind][name])
        assert sqrt(shares[name]) * found.rss[kind] == pytest.approx(alone, rel=1e-12, abs=1e-15)


def test_offset_does_not_move_the_width() -> None:
    found = hk.spread(uncertain_design(hk.Stage("inverting")))
    assert found.contributions["width"]["offset"] == 0
    assert found.contributions["upper"]["offset"] > 0


@pytest.mark.parametrize("stage", [*map(full, hk.Stage.all())], ids=lambda stage: stage.title)
def test_per_volt_is_the_exact_difference(stage: hk.Stage) -> None:
    # Trips are affine in the supply, so that the difference over a whole volt is exact.
    design = uncertain_design(stage)
    design = design.with_levels(**dict.fromkeys(design.levels.keys() & {"V_PU"}))
    trips = hk.trip_points(design, V_CC=[5.0, 6.0])
    found = hk.spread(design).per_volt
    for kind in KINDS:
        step = np.diff(getattr(trips, kind))[0]
        assert found[kind] == pytest.approx(step, rel=1e-9, abs=1e-12)


def test_a_ratiometric_stage_follows_its_supply() -> None:
    design = uncertain_design(hk.Stage("inverting"), device=hk.Device())
    found = hk.spread(design).per_volt
    assert found["upper"] == pytest.approx(hk.trip_points(design).upper / 5.0, rel=1e-12)


def test_per_kelvin_is_the_sum_of_all_coefficients() -> None:
    design = uncertain_design(hk.Stage("inverting"))
    found = hk.spread(design).per_kelvin["upper"]
    by_name = slopes(design, [*design.parts, "offset"])["upper"]
    rates = [by_name[n] * part.value * 1e-4 for n, part in design.parts.items()]
    rates.append(by_name["offset"] * 8e-6)
    assert found.worst == pytest.approx(sum(map(abs, rates)), rel=1e-12)
    assert found.rss == pytest.approx(hypot(*rates), rel=1e-12)
    assert by_name["offset"] == pytest.approx(-1, rel=1e-12)


def test_per_kelvin_of_an_offset_that_is_zero() -> None:
    bare = replace(uncertain_design(hk.Stage("inverting")).device, offset=0.0, limits={})
    design = uncertain_design(hk.Stage("inverting"), device=bare)
    design = design.with_parts(**{n: hk.Part(p.value) for n, p in design.parts.items()})
    assert hk.spread(design).per_kelvin["upper"].worst == pytest.approx(8e-6, rel=1e-12)


@pytest.mark.parametrize("stage", [*map(full, hk.Stage.all())], ids=lambda stage: stage.title)
def test_slopes_are_those_of_the_law(stage: hk.Stage) -> None:
    design = uncertain_design(stage)
    law = hk.derive(design)
    at = {symbol: design.values[symbol.name] for symbol in law.upper.free_symbols}
    found = slopes(design, stage.parts)
    for name in stage.parts:
        (symbol,) = [s for s in law.formulas.upper.free_symbols | law.lower.free_symbols
                     if s.name == name] or [None]  # fmt: skip
        expected = 0.0 if symbol is None else float(sp.diff(law.upper, symbol).subs(at))
        assert found["upper"][name] == pytest.approx(expected, rel=1e-9, abs=1e-18)
