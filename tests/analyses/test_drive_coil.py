"""How a coil lets go: against the differential equation, solved step by step."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

import hystkit as hk
from hystkit.analyses.drive.coil import Coil

CLAMPS = [
    hk.drives.Diode(),
    hk.drives.DiodeAndZener("24 V"),
    hk.drives.DiodeAndResistor("360"),
    hk.drives.ClampAtSwitch("36 V"),
]
OHMS, HENRY, VOLTS = 360.0, 0.7, 12.0


def at_switch(clamp: Any, current: Any) -> Any:
    """Voltage across the open switch: what each circuit is wired from."""
    if isinstance(clamp, hk.drives.ClampAtSwitch):
        return clamp.voltage + 0 * current
    volts = clamp.v_f + getattr(clamp, "v_z", 0.0)
    return VOLTS + volts + getattr(clamp, "resistance", 0.0) * current


@pytest.mark.parametrize("clamp", CLAMPS, ids=lambda clamp: type(clamp).__name__)
def test_release_against_the_differential_equation(clamp: Any) -> None:
    """Kirchhoff's voltage law round supply, coil and switch: V - v_switch = L di/dt + R i."""
    coil = Coil(OHMS, HENRY, VOLTS, clamp=clamp)
    found = coil.release()

    def rates(_: float, y: Any) -> list[float]:
        current = y[0]
        over = at_switch(clamp, current)
        across = over if isinstance(clamp, hk.drives.ClampAtSwitch) else over - VOLTS
        return [(VOLTS - over - OHMS * current) / HENRY, across * current, OHMS * current**2,
                VOLTS * current]  # fmt: skip

    def let_go(_: float, y: Any) -> float:
        return float(y[0] - 0.1 * VOLTS / OHMS)

    def ended(_: float, y: Any) -> float:
        return float(y[0])

    ended.terminal = True  # type: ignore[attr-defined]
    start = [VOLTS / OHMS, 0.0, 0.0, 0.0]
    solved = solve_ivp(rates, (0, 1), start, events=(let_go, ended), rtol=1e-11, atol=1e-15)
    (time,), (_, clamped, heated, delivered) = solved.t_events[0], solved.y_events[1][0]
    assert found.time == pytest.approx(time, rel=1e-8)
    assert found.peak == pytest.approx(at_switch(clamp, VOLTS / OHMS), rel=1e-12)
    assert found.clamp_energy == pytest.approx(clamped, rel=1e-7)
    assert found.winding_energy == pytest.approx(heated, rel=1e-7)
    through = isinstance(clamp, hk.drives.ClampAtSwitch)
    assert found.supply_energy == pytest.approx(delivered if through else 0.0, rel=1e-7)


@given(
    ohms=st.floats(1, 1e4),
    henry=st.floats(1e-3, 10),
    volts=st.floats(3, 60),
    clamp=st.one_of(
        st.floats(0.2, 2).map(hk.drives.Diode),
        st.floats(2, 200).map(hk.drives.DiodeAndZener),
        st.floats(1, 1e4).map(hk.drives.DiodeAndResistor),
        st.floats(61, 500).map(hk.drives.ClampAtSwitch),
    ),
)
def test_no_energy_is_lost(ohms: float, henry: float, volts: float, clamp: Any) -> None:
    """Conservation of energy, with the winding's share from the current over time by quadrature."""
    found = Coil(ohms, henry, volts, clamp=clamp).release()
    opposing = at_switch(clamp, 0.0) - VOLTS
    if isinstance(clamp, hk.drives.ClampAtSwitch):
        opposing = clamp.voltage - volts
    total = ohms + getattr(clamp, "resistance", 0.0)
    current, limit = volts / ohms, opposing / total
    end = henry / total * np.log1p(current / limit)
    nodes, weights = np.polynomial.legendre.leggauss(60)
    flow = (current + limit) * np.exp(-(nodes + 1) / 2 * end * total / henry) - limit
    heated = ohms * end / 2 * float(weights @ flow**2)
    delivered = volts * end / 2 * float(weights @ flow) if clamp.through_supply else 0.0
    assert found.winding_energy == pytest.approx(heated, rel=1e-6)
    assert found.supply_energy == pytest.approx(delivered, rel=1e-6)
    stored = henry * current**2 / 2
    assert found.clamp_energy == pytest.approx(stored + delivered - heated, rel=1e-6)


def test_the_textbook_limits_of_the_release() -> None:
    """A short circuit gives (L/R) ln(1/share); a far higher clamp L I (1 - share) / V."""
    coil = Coil(OHMS, HENRY, VOLTS)
    assert coil.slowest == pytest.approx(HENRY / OHMS * np.log(10), rel=1e-12)
    assert coil.release_time(VOLTS + 1e6) == pytest.approx(
        HENRY * VOLTS / OHMS * 0.9 / 1e6, rel=1e-4
    )


def test_a_diode_lets_go_faster_than_a_short_and_slower_than_any_other() -> None:
    coil = Coil(OHMS, HENRY, VOLTS)
    diode, *others = [coil.release(clamp) for clamp in CLAMPS]
    assert diode.time < coil.slowest
    for other in others:
        assert other.time < diode.time
        assert other.peak > diode.peak


@given(low=st.floats(0.5, 100), more=st.floats(0.5, 100))
def test_a_larger_clamp_trades_a_higher_peak_for_a_shorter_release(low: float, more: float) -> None:
    coil = Coil(hk.Part(OHMS, tol=0.1), HENRY, hk.Part(VOLTS, tol=0.1))
    small, large = (coil.release(hk.drives.DiodeAndZener(volts)) for volts in (low, low + more))
    assert large.time < small.time
    assert large.peak > small.peak
    assert large.clamp_energy > small.clamp_energy
    assert coil.release_time(small.peak) == pytest.approx(small.time, rel=1e-9)


@given(times=st.lists(st.floats(1e-5, 4e-3), min_size=1, max_size=5))
def test_the_peak_for_a_release_time_is_its_inverse(times: list[float]) -> None:
    coil = Coil(OHMS, HENRY, VOLTS)
    peaks = coil.peak_for(np.array(times))
    assert peaks.shape == (len(times),)
    assert coil.release_time(peaks) == pytest.approx(times, rel=1e-6)


def test_no_clamp_is_needed_for_a_release_that_may_be_slow() -> None:
    coil = Coil(OHMS, HENRY, VOLTS)
    assert coil.peak_for(2 * coil.slowest) == VOLTS
    assert np.isnan(coil.release_time([VOLTS, VOLTS - 1])).all()
    assert np.isnan(coil.peak_for(0.0))


@given(ohms=st.floats(-1, 1), volts=st.floats(-1, 1))
def test_tolerances_give_the_worst_of_all_units(ohms: float, volts: float) -> None:
    for clamp in CLAMPS:
        worst = Coil(hk.Part(OHMS, tol=0.1), HENRY, hk.Part(VOLTS, tol=0.1), clamp).release()
        # A unit lets go at a tenth of the rated current, whatever its own.
        current = VOLTS * (1 + 0.1 * volts) / (OHMS * (1 + 0.1 * ohms))
        share = 0.1 * (VOLTS / OHMS) / current
        unit = Coil(OHMS * (1 + 0.1 * ohms), HENRY, VOLTS * (1 + 0.1 * volts), clamp, share)
        assert unit.release().time <= worst.time * (1 + 1e-9)
        assert unit.release().peak <= worst.peak * (1 + 1e-9)


def test_every_fault_of_a_coil_is_told_at_once() -> None:
    with pytest.raises(hk.DesignError) as caught:
        Coil("12 V", "-1", "q", clamp="diode", drop_out=2, name=3)  # type: ignore[arg-type]
    assert len(caught.value.faults) == 6
    with pytest.raises(hk.DesignError, match="conducts all the time"):
        Coil(360, 0.7, hk.Part(12, tol=0.1), hk.drives.ClampAtSwitch(13))
    with pytest.raises(hk.DesignError, match="nothing takes over"):
        Coil(360, 0.7, 12, clamp=None).release()
    with pytest.raises(hk.DesignError) as caught:
        hk.drives.DiodeAndZener("-24", v_f=0)
    assert len(caught.value.faults) == 2


def test_views_of_a_coil_show_its_trade() -> None:
    text = Coil("360", "700m", "12 V", hk.drives.DiodeAndZener(24)).to_text()
    for shown in ("360 Ω", "700 mH", "36.7 V", "24 V Zener diode"):
        assert shown in text
    assert "none" in Coil("360", "700m", "12 V", clamp=None).to_text()


def test_contact_life() -> None:
    # Rated operations over 8760 h a year: common practice.
    assert hk.contact_life(1e5, 1.43) == pytest.approx(1e5 / (8760 * 1.43))
    assert hk.contact_life("100k", 10) == pytest.approx(1.1416, rel=1e-4)
    years = hk.contact_life(np.array([1e5, 1e6])[:, None], [1.0, 0.0, -1.0])
    assert years.shape == (2, 3)
    assert np.isinf(years[:, 1]).all()
    assert np.isnan(years[:, 2]).all()
    with pytest.raises(hk.InputError) as caught:
        hk.contact_life(None, "often")
    assert len(caught.value.faults) == 2
