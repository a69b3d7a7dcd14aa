"""The Python that `as_code` writes rebuilds the design when it runs."""

from __future__ import annotations

from hypothesis import given

import hystkit as hk
from tests.circuit.strategies import designs


def run(code: str) -> object:
    """Evaluate with nothing but the package's usual short name in sight."""
    return eval(code, {"__builtins__": {}, "hk": hk})


@given(designs())
def test_it_runs_to_an_equal_design(design: hk.Design) -> None:
    code = design.as_code()
    assert run(code) == design
    assert code == run(code).as_code()  # type: ignore[attr-defined]


def test_it_reads_as_one_would_write_it() -> None:
    design = hk.Design(
        hk.Stage("inverting", output="open-collector"),
        {"R_T": "46k4", "R_B": hk.Part("26k7", tol="1 %"), "R_F": 1e5 / 7, "R_PU": "4k7"},
        supply=hk.Supply(5, tol=0.02),
        device=hk.Device(drop_low=0.2),
        levels={"V_PU": 12},
        name="pump's tank",
    )
    assert design.as_code().splitlines() == [
        "hk.Design(",
        '    hk.Stage("inverting", supply="single", reference="divider", output="open-collector"),',
        """    parts={"R_T": "46k4", "R_B": hk.Part("26k7", tol=0.01), "R_F": 14285.714285714286,"""
        """ "R_PU": "4k7"},""",
        "    supply=hk.Supply(5.0, tol=0.02),",
        "    device=hk.Device(drop_low=0.2),",
        '    levels={"V_PU": 12.0},',
        """    name="pump's tank",""",
        ")",
    ]
