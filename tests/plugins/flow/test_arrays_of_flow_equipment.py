"""Every axis is welcome: rows agree with single points, and a bad row fails alone."""

from __future__ import annotations

import numpy as np
import pytest

import lostwork as lw

PRESSURES = np.array([[1.2, 2.0, 3.0], [3.5, 4.0, 4.5]])


def _bar(values):
    return lw.quantity(np.asarray(values) * 1e5, "Pa")


def _steps(inlet, p):
    """Steps that take an outlet pressure, above (1 + p) or below the 5 bar of the inlet."""
    above = lw.quantity(p.to("Pa").magnitude + 5e5, "Pa")
    yield "throttling", {"p_out": p}
    yield "expansion", {"p_out": p, "isentropic_efficiency": 0.8}
    yield "expansion", {"p_out": p, "polytropic_efficiency": 0.8, **_LOSS}
    yield "compression", {"p_out": above, "polytropic_efficiency": 0.8}
    yield "compression", {"p_out": above, "isentropic_efficiency": 0.8, **_LOSS}
    yield "heating", {"p_out": p, "T_out": "500 K", "at": "520 K"}
    yield "heating", {"p_out": p, "duty": "50 kW", "electric": True}
    yield "cooling", {"p_out": p, "T_out": "420 K", "at": "400 K"}
    yield "nozzle", {"p_out": p, "isentropic_efficiency": 0.95}
    yield (
        "diffuser",
        {"pressure_rise": "0.2 bar", "isentropic_efficiency": p / lw.quantity(9e5, "Pa")},
    )
    yield "pipe", {"p_out": p, "heat_leak": "-3 kW", "heat_leak_at": "300 K"}
    yield "flash-separation", {"p_out": p}


_LOSS = {"heat_loss_fraction": 0.03, "heat_loss_at": "310 K"}


def test_rows_agree_with_single_points_whatever_the_shape(site) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="460 K", p="5 bar"), rate="2 kg/s", velocity="400 m/s")
    swept = list(_steps(inlet, _bar(PRESSURES)))
    for place in ((0, 0), (1, 2)):
        singles = _steps(inlet, _bar(PRESSURES[place]))
        for (kind, many), (_, one) in zip(swept, singles, strict=True):
            rows = lw.process(kind, inlet=inlet, **many).balance(site)
            point = lw.process(kind, inlet=inlet, **one).balance(site)
            assert rows.shape == PRESSURES.shape, kind
            assert point.shape == (), kind
            assert rows.work_lost_si[place] == pytest.approx(point.work_lost_si, rel=1e-8), kind
            parts = {name: np.broadcast_to(x, (2, 3))[place] for name, x in rows.losses_si.items()}
            assert parts == pytest.approx(dict(point.losses_si), rel=1e-7, abs=1e-4), kind


@pytest.mark.parametrize("kind", ["throttling", "expansion", "nozzle", "pipe", "heating"])
def test_a_row_that_cannot_run_fails_alone_and_says_why(site, constant_air, kind: str) -> None:
    inlet = lw.Stream(constant_air.state(T="400 K", p="5 bar"), rate="1 kg/s")
    given = {
        "expansion": {"polytropic_efficiency": 0.8},
        "nozzle": {"isentropic_efficiency": 0.9},
        "heating": {"T_out": "450 K", "at": "500 K"},
    }.get(kind, {})
    step = lw.process(kind, name="row", inlet=inlet, p_out=["2 bar", "6 bar", "3 bar"], **given)
    outlet = step.outlet.state
    assert np.isnan(outlet.si.h).tolist() == [False, True, False]
    assert "above the inlet pressure" in outlet.failed[1]
    verdict = step.balance(site).verdict
    assert verdict.statuses.tolist() == ["possible", "undecided", "possible"]
    assert "above the inlet pressure" in verdict.reason


def test_a_failed_row_stays_failed_downstream(constant_air) -> None:
    inlet = lw.Stream(constant_air.state(T="400 K", p="5 bar"), rate="1 kg/s")
    valve = lw.process("throttling", inlet=inlet, p_out=["2 bar", "6 bar"])
    heater = lw.process("heating", inlet=valve.outlet, T_out="450 K", at="500 K")
    turbine = lw.process(
        "expansion", inlet=heater.outlet, pressure_ratio=1.5, polytropic_efficiency=0.9
    )
    mixed = lw.process("mixing", inflows=[turbine.outlet, inlet], p_out="1 bar")
    for step in (turbine, mixed):
        assert np.isnan(step.outlet.state.si.h).tolist() == [False, True]
        assert list(step.outlet.state.failed) == [1]


def test_an_exchanger_of_rows_refuses_only_those_that_cross(site, constant_air) -> None:
    hot = lw.Stream(constant_air.state(T="500 K", p="2 bar"), rate="1 kg/s")
    cold = lw.Stream(constant_air.state(T="300 K", p="2 bar"), rate="1 kg/s")
    duties = lw.quantity(np.array([50e3, 150e3, 250e3]), "W")
    step = lw.process("heat-exchange", hot=hot, cold=cold, duty=duties)
    assert np.isnan(step.outlets["cold"].state.si.T).tolist() == [False, False, True]
    assert "temperatures cross" in step.outlets["hot"].state.failed[2]
    assert step.approach_reached.magnitude[:2] == pytest.approx(
        [200 - 50e3 / 1005, 200 - 150e3 / 1005]
    )


def test_purposes_are_nan_only_in_rows_without_one() -> None:
    fluid = lw.Fluid("R134a", backend="coolprop")
    site = lw.Surroundings(T="298.15 K", p="1 bar")
    inlet = lw.Stream(fluid.state(T="30 degC", p="8 bar"), rate="1 kg/s")
    efficiency = (
        lw.process("throttling", inlet=inlet, p_out=["7.9 bar", "2 bar"]).balance(site).efficiency
    )
    assert np.isnan(efficiency).tolist() == [True, False]


def test_units_do_not_matter(site, constant_air) -> None:
    state = constant_air.state(T="80 degF", p="14.5037738 psi")
    given = {"p_out": "8 bar", "isentropic_efficiency": "80 %"}
    american = lw.process("compression", inlet=lw.Stream(state, rate="7200 lb/h"), **given)
    metric_state = constant_air.state(T=lw.quantity(state.si.T, "K"), p="100 kPa")
    metric = lw.process(
        "compression",
        inlet=lw.Stream(metric_state, rate="0.90718474 kg/s"),
        p_out="0.8 MPa",
        isentropic_efficiency=0.8,
    )
    assert american.balance(site).work_lost_si == pytest.approx(
        metric.balance(site).work_lost_si, rel=1e-8
    )


def test_a_row_whose_polytropic_path_leaves_the_equation_says_so() -> None:
    fluid = lw.Fluid("R134a", backend="coolprop")
    inlet = lw.Stream(fluid.state(T=["300 K", "440 K"], p="1 bar"), rate="1 kg/s")
    step = lw.process("compression", inlet=inlet, pressure_ratio=4, polytropic_efficiency=0.6)
    assert np.isnan(step.outlet.state.si.T).tolist() == [False, True]
    assert "the polytropic path leaves the model" in step.outlet.state.failed[1]
    hot = lw.Stream(fluid.state(T="440 K", p="1 bar"), rate="1 kg/s")
    with pytest.raises(lw.ProcessError, match="outside the equation of R134a"):
        lw.process("compression", inlet=hot, pressure_ratio=4, polytropic_efficiency=0.6).solve()
