"""What holds of every piece of equipment, on every backend, whatever the legal input."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import lostwork as lw

FLUIDS = {
    "ideal-gas": ("nitrogen", {}),
    "ideal-gas of constant cp": ("nitrogen", {"cp": "1040 J/kg/K"}),
    "coolprop": ("propane", {}),
    "cubic": ("propane", {}),
}


def _fluid(backend: str) -> lw.Fluid:
    name, options = FLUIDS[backend]
    return lw.Fluid(name, backend=backend.split(" of ", maxsplit=1)[0], **options)


def _q(value: float, unit: str) -> Any:
    return lw.quantity(value, unit)


class Draw:
    """Legal input for any step, in ranges where every backend has states."""

    def __init__(self, fluid: lw.Fluid, numbers: dict[str, float]) -> None:
        self.fluid = fluid
        self.n = numbers

    def inlet(self, shift: float = 0.0) -> lw.Stream:
        T, p = self.n["T"] + shift, self.n["p"]
        return lw.Stream(
            self.fluid.state(T=_q(T, "K"), p=_q(p, "Pa")),
            rate=_q(self.n["rate"], "kg/s"),
            velocity="20 m/s",
        )


def _heat_exchange(d: Draw, arrangement: str) -> lw.Process:
    hot, cold = d.inlet(d.n["gap"]), d.inlet()
    return lw.process(
        "heat-exchange",
        hot=hot,
        cold=cold,
        effectiveness=0.9 * d.n["share"] if arrangement == "counter" else 0.4 * d.n["share"],
        arrangement=arrangement,
        pressure_drop_cold=_q(0.01 * d.n["p"], "Pa"),
    )


STEPS: dict[str, Callable[[Draw], lw.Process]] = {
    "throttling": lambda d: lw.process("throttling", inlet=d.inlet(), pressure_ratio=d.n["ratio"]),
    "compression by isentropic efficiency": lambda d: lw.process(
        "compression",
        inlet=d.inlet(),
        pressure_ratio=d.n["ratio"],
        isentropic_efficiency=d.n["efficiency"],
    ),
    "compression by polytropic efficiency, losing heat": lambda d: lw.process(
        "compression",
        inlet=d.inlet(),
        pressure_ratio=d.n["ratio"],
        polytropic_efficiency=d.n["efficiency"],
        heat_loss_fraction=0.05,
        heat_loss_at=_q(0.7 * d.n["T"], "K"),
        mechanical_efficiency=0.97,
        mechanical_loss_at="300 K",
    ),
    "expansion by isentropic efficiency, losing heat": lambda d: lw.process(
        "expansion",
        inlet=d.inlet(),
        pressure_ratio=d.n["ratio"],
        isentropic_efficiency=d.n["efficiency"],
        heat_loss_fraction=0.05,
        heat_loss_at=_q(0.6 * d.n["T"], "K"),
    ),
    "expansion by polytropic efficiency": lambda d: lw.process(
        "expansion",
        inlet=d.inlet(),
        pressure_ratio=d.n["ratio"],
        polytropic_efficiency=d.n["efficiency"],
    ),
    "heating": lambda d: lw.process(
        "heating",
        inlet=d.inlet(),
        T_out=_q(d.n["T"] + d.n["gap"], "K"),
        at=_q(d.n["T"] + d.n["gap"] * (1.0 + d.n["share"]), "K"),
        pressure_drop=_q(0.02 * d.n["p"], "Pa"),
    ),
    "electric heating": lambda d: lw.process(
        "heating", inlet=d.inlet(), T_out=_q(d.n["T"] + d.n["gap"], "K"), electric=True
    ),
    "cooling": lambda d: lw.process(
        "cooling",
        inlet=d.inlet(d.n["gap"]),
        T_out=_q(d.n["T"] + 0.2 * d.n["gap"], "K"),
        at=_q(d.n["T"] + 0.2 * d.n["gap"] - 60.0 * d.n["share"], "K"),
        pressure_drop=_q(0.02 * d.n["p"], "Pa"),
    ),
    "counterflow exchange": lambda d: _heat_exchange(d, "counter"),
    "parallel-flow exchange": lambda d: _heat_exchange(d, "parallel"),
    "mixing": lambda d: lw.process(
        "mixing",
        inflows=[
            d.inlet(),
            lw.process("throttling", inlet=d.inlet(d.n["gap"]), pressure_ratio=d.n["ratio"]).outlet,
        ],
    ),
    "splitting": lambda d: lw.process(
        "splitting", inlet=d.inlet(), fractions={"a": d.n["share"], "b": 1.0 - d.n["share"]}
    ),
    "nozzle": lambda d: lw.process(
        "nozzle",
        inlet=d.inlet(),
        pressure_ratio=d.n["ratio"],
        isentropic_efficiency=d.n["efficiency"],
    ),
    "diffuser": lambda d: lw.process(
        "diffuser",
        inlet=lw.process(
            "nozzle", inlet=d.inlet(), pressure_ratio=d.n["ratio"], isentropic_efficiency=0.99
        ).outlet,
        velocity_out="10 m/s",
        isentropic_efficiency=d.n["efficiency"],
    ),
    "pipe": lambda d: lw.process(
        "pipe",
        inlet=d.inlet(),
        p_out=_q(d.n["p"] / d.n["ratio"], "Pa"),
        heat_leak=_q(1e4 * d.n["share"] * d.n["rate"], "W"),
        heat_leak_at=_q(d.n["T"] + 60.0, "K"),
    ),
}

NUMBERS = st.fixed_dictionaries(
    {
        "T": st.floats(330.0, 400.0),
        "p": st.floats(1e5, 8e5),
        "rate": st.floats(0.1, 50.0),
        "ratio": st.floats(1.0, 4.0),
        "efficiency": st.floats(0.4, 1.0),
        "gap": st.floats(5.0, 40.0),
        "share": st.floats(0.05, 0.95),
        "T0": st.floats(250.0, 330.0),
    }
)


@pytest.mark.parametrize("backend", FLUIDS)
@pytest.mark.parametrize("kind", STEPS)
@settings(
    max_examples=12,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture],
)
@given(numbers=NUMBERS)
def test_every_legal_step_is_possible_and_its_books_close(
    kind: str, backend: str, numbers: dict[str, float], assert_sound
) -> None:
    step = STEPS[kind](Draw(_fluid(backend), numbers))
    site = lw.Surroundings(T=_q(numbers["T0"], "K"), p="1 atm")
    balance = assert_sound(step, site)
    actual, best = balance.work_total.magnitude, balance.work_reversible.magnitude
    assert best <= actual + balance.verdict.tolerance_si * numbers["T0"]


@pytest.mark.parametrize("backend", FLUIDS)
@settings(max_examples=6, deadline=None)
@given(numbers=NUMBERS)
def test_rows_are_what_single_points_are(backend: str, numbers: dict[str, float]) -> None:
    fluid, site = _fluid(backend), lw.Surroundings(T="290 K", p="1 bar")
    T = np.array([numbers["T"], numbers["T"] + numbers["gap"]])
    inlet = lw.Stream(fluid.state(T=_q(T, "K"), p=_q(numbers["p"], "Pa")), rate="1 kg/s")
    fields = {
        "pressure_ratio": numbers["ratio"],
        "polytropic_efficiency": numbers["efficiency"],
    }
    rows = lw.process("compression", inlet=inlet, **fields).balance(site).work_lost_si
    for row, T_row in zip(rows, T, strict=True):
        point = lw.Stream(
            fluid.state(T=_q(float(T_row), "K"), p=_q(numbers["p"], "Pa")), rate="1 kg/s"
        )
        lost = lw.process("compression", inlet=point, **fields).balance(site).work_lost_si
        assert lost == pytest.approx(row, rel=1e-7, abs=1e-3)


@settings(max_examples=10, deadline=None)
@given(T=st.floats(280.0, 330.0), rise=st.floats(1e5, 200e5), efficiency=st.floats(0.2, 1.0))
def test_every_pump_is_possible(T: float, rise: float, efficiency: float, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T=_q(T, "K"), p="1 bar"), rate="5 kg/s")
    step = lw.process(
        "pumping",
        inlet=inlet,
        pressure_rise=_q(rise, "Pa"),
        isentropic_efficiency=efficiency,
    )
    assert_sound(step, lw.Surroundings(T="293 K", p="1 bar"))


@settings(max_examples=10, deadline=None)
@given(quality=st.floats(0.0, 1.0), ratio=st.floats(1.01, 20.0))
def test_every_flash_of_a_wet_refrigerant_is_possible(
    quality: float, ratio: float, assert_sound
) -> None:
    fluid = lw.Fluid("R134a", backend="coolprop")
    inlet = lw.Stream(fluid.state(p="12 bar", quality=quality), rate="1 kg/s")
    step = lw.process("flash-separation", inlet=inlet, p_out=_q(12e5 / ratio, "Pa"))
    assert_sound(step, lw.Surroundings(T="293 K", p="1 bar"))
