"""When nothing fits: the reason, and changes that do fit when they are made."""

from __future__ import annotations

from typing import Any

import pytest

import hystkit as hk
from hystkit.circuit.signals import Linear

INVERTING = hk.Stage("inverting")
DEVICE = hk.Device(drop_low=0.2, offset=1e-3, limits={"offset": (-3e-3, 3e-3)})
TANK = Linear(1.2, 0.6, span=(0, 2), unit="m", name="level")


def windows(half: float, upper: float = 2.7, lower: float = 2.3) -> dict[str, Any]:
    return {"upper": (upper - half, upper + half), "lower": (lower - half, lower + half)}


REQUESTS: dict[str, dict[str, Any]] = {
    "narrow windows": {"stage": INVERTING, "supply": 5.0, "series": "E24", **windows(0.01)},
    "coarse series": {"stage": INVERTING, "supply": 5.0, "series": "E3", "tol": 0.0,
                      **windows(0.04, 2.81, 2.32)},
    "coarse and loose": {"stage": INVERTING, "supply": 5.0, "series": "E3", "tol": 0.05,
                         **windows(0.04, 2.81, 2.32)},
    "loose supply": {"stage": INVERTING, "supply": hk.Supply(5.0, tol=0.05), "series": "E24",
                     **windows(0.05)},
    "loose parts and supply": {"stage": INVERTING, "supply": hk.Supply(5.0, tol=0.05), "tol": 0.05,
                               "series": "E24", **windows(0.03)},
    "a loose fixed part": {"stage": INVERTING, "supply": 5.0, "tol": 0.001, "series": "E24",
                           "parts": {"R_B": hk.Part("100k", tol=0.05)}, **windows(0.05)},
    "narrow range": {"stage": INVERTING, "supply": 5.0, "ranges": ("30k", "100k"), **windows(0.05)},
    "limits": {"stage": INVERTING, "supply": 5.0, "series": "E12", **windows(0.05),
               "limits": {"supply_current": "50 uA", "input_resistance": "10k"}},
    "a limit that nothing keeps": {"stage": INVERTING, "supply": 5.0, "upper": 2.7, "lower": 2.3,
                                   "limits": {"supply_current": "2 uA"}},
    "another form": {"stage": INVERTING, "supply": 5.0, "upper": 5.2, "lower": 4.9},
    "in the measurand": {"stage": INVERTING, "supply": hk.Supply(5.0, tol=0.03), "signal": TANK,
                         "on_at": (0.79, 0.81), "off_at": (1.40, 1.42), "series": "E24"},
    "settings by part": {"stage": INVERTING, "supply": 5.0, **windows(0.02),
                         "series": {"R_T": "E24", "R_B": "E24", "R_F": ["100k", "220k"]},
                         "tol": {"R_T": 0.01, "R_B": 0.02, "R_F": 0.05}},
    "a real device": {"stage": hk.Stage("inverting", output="open-collector"), "supply": 5.0,
                      "device": DEVICE, "parts": {"R_PU": "4k7"}, "series": "E12", **windows(0.02)},
}  # fmt: skip


@pytest.mark.parametrize("name", REQUESTS)
def test_every_suggestion_holds_when_it_is_followed(name: str) -> None:
    request = REQUESTS[name]
    found = hk.size(**request, count=3)
    assert not found.fits
    assert found.reason
    assert found.suggestions
    for suggestion in found.suggestions:
        changed = hk.size(**(request | suggestion.changes), count=1, suggest=False)
        assert changed.fits, suggestion.text
        assert changed[0].design == suggestion.candidate.design
        assert suggestion.candidate.holds


def kinds(name: str) -> dict[str, str]:
    return {"+".join(s.changes): s.text for s in hk.size(**REQUESTS[name], count=1).suggestions}


def test_the_smallest_of_each_kind() -> None:
    assert kinds("coarse series")["series"] in ("series E6", "series E12", "series E24")
    assert kinds("loose supply")["supply"] == "supply tolerance 0.5 %"
    assert "supply" not in kinds("narrow windows")
    narrow = kinds("narrow windows")
    assert narrow["tol+parts"] == "tolerance 0.25 % for R_T, R_B, R_F"
    # One step looser does not do.
    looser = REQUESTS["narrow windows"] | {"tol": 0.005}
    assert not hk.size(**looser, count=1, suggest=False).fits


def test_two_kinds_together_where_neither_helps_alone() -> None:
    found = kinds("coarse and loose")
    assert "series" not in found
    assert "tol+parts" not in found
    assert " and tolerance " in found["series+tol+parts"]
    assert kinds("loose parts and supply")["tol+parts+supply"].endswith("and the supply")


def test_wider_windows_are_the_smallest_that_hold() -> None:
    request = REQUESTS["narrow windows"]
    (wider,) = [s for s in hk.size(**request, count=1).suggestions if "upper" in s.changes]
    (a, b), half = wider.changes["upper"], 0.01
    assert a + b == pytest.approx(5.4, abs=1e-3)
    factor = (b - a) / (2 * half)
    assert wider.text.startswith(f"windows {factor:.3g} times as wide: upper {a:g} V to {b:g} V")
    tighter = windows(0.999 * half * factor)
    assert not hk.size(**(request | tighter), count=1, suggest=False).fits


def test_windows_are_never_widened_until_they_overlap() -> None:
    found = hk.size(INVERTING, supply=hk.Supply(5.0, tol=0.2), **windows(0.05), count=1)
    assert not found.fits
    assert not [s for s in found.suggestions if "upper" in s.changes]


def test_wider_windows_in_the_unit_that_was_asked_in() -> None:
    (wider,) = [
        s for s in hk.size(**REQUESTS["in the measurand"], count=1).suggestions
        if "on_at" in s.changes
    ]  # fmt: skip
    assert " m" in wider.text
    assert set(wider.changes) == {"on_at", "off_at"}


def test_relaxed_limit_is_nearly_the_smallest() -> None:
    request = REQUESTS["limits"]
    relaxed = [s for s in hk.size(**request, count=1).suggestions if "limits" in s.changes]
    assert {s.text.split(" ")[0] for s in relaxed} == {"supply", "input"}
    for suggestion in relaxed:
        limits = suggestion.changes["limits"].given
        (name,) = [n for n in limits if limits[n] != {"supply_current": 50e-6,
                                                      "input_resistance": 10e3}[n]]  # fmt: skip
        closer = request | {"limits": limits | {name: 0.94 * limits[name]}}
        assert not hk.size(**closer, count=1, suggest=False).fits


def test_another_form_is_named_where_no_resistor_ratio_can() -> None:
    found = hk.size(**REQUESTS["another form"], count=1)
    assert not found.fits
    assert any(s.text.startswith("the form non-inverting") for s in found.suggestions)


@pytest.mark.parametrize(
    ("request_", "text"),
    [
        (REQUESTS["narrow windows"],
         "over all tolerances the best combination leaves the window of the upper trip by 14.99 mV:"
         " the trip spreads over 49.68 mV, the window is 20 mV wide"),
        (REQUESTS["a limit that nothing keeps"],
         "no combination of values keeps the limits (supply current 2 µA)"),
        ({"stage": INVERTING, "supply": 5.0, "upper": 7.0, "lower": 6.8},
         "the nearest trips lie 2.005 V off, more than half of the wanted width of 200 mV"),
        (REQUESTS["limits"],
         "even the nominal trips of the best combination leave a window: they lie 36.3 half-widths"
         " from its middle, within the limits (supply current 50 µA, input resistance 10 kΩ)"),
        ({"stage": hk.Stage("inverting", output="open-collector"), "supply": 5.0,
          "device": hk.Device(leakage=1e-3), "ranges": ("10k", "100k"),
          "parts": {"R_PU": "100k"}, "upper": 2.7, "lower": 2.3},
         "no combination of values switches with every combination of tolerances"),
    ],
)  # fmt: skip
def test_reason(request_: dict[str, Any], text: str) -> None:
    found = hk.size(**request_, suggest=False)
    assert found.reason == text
    assert found.suggestions == ()
    assert "nothing fits" in found.to_text()


def test_what_fits_has_no_reason() -> None:
    found = hk.size(INVERTING, supply=5.0, **windows(0.05))
    assert found.fits
    assert found.reason == ""
    assert found.suggestions == ()
