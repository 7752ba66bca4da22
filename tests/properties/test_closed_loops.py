"""What goes round comes back: cycles of reversible paths, and dh = T ds + v dp on the way."""

from __future__ import annotations

from typing import Any

import numpy as np
from _exploring import explore
from _materials import Material, every_material
from hypothesis import strategies as st

import lostwork as lw

_FEW_NODES, _MANY_NODES = 12, 20
_CLOSURE = 1e-7


@st.composite
def _corners(draw: st.DrawFn, /, *, material: Material) -> tuple[lw.State, float, float]:
    """A gas, a ratio of volumes, and a fraction by which temperature or pressure falls."""
    low, high = material.T
    T = draw(st.integers(round(0.4 * low + 0.6 * high), round(0.9 * high)))
    share = draw(st.integers(0, 100)) / 100.0
    first, last = max(material.p[0], 5e4), min(material.p[1], 4e6)
    p = first * (last / first) ** share
    ratio = draw(st.integers(11, 30)) / 10.0
    fall = draw(st.integers(75, 98)) / 100.0
    return material.fluid.state_si(("T", "p"), float(T), p), ratio, fall


def _scales(state: lw.State) -> tuple[float, float]:
    """R and R T of the fluid, J/kg/K and J/kg."""
    entropy = lw.R / state.fluid.molar_mass_si
    return entropy, entropy * float(state.si.T)


def _assert_closed(start: lw.State, legs: list[lw.Path]) -> None:
    """End where it started, with nothing generated and all net heat turned into work."""
    end = legs[-1].end
    entropy, energy = _scales(start)
    noise = max(float(s.fluid.noise_at(s.si.T, s.si.p)) for s in (start, *(x.end for x in legs)))
    T = float(start.si.T)
    assert abs(end.si.s - start.si.s) <= _CLOSURE * entropy + 4.0 * noise
    assert abs(end.si.u - start.si.u) <= _CLOSURE * energy + 4.0 * T * noise
    work = sum(float(leg.work.magnitude) for leg in legs)
    heat = sum(float(leg.heat.magnitude) for leg in legs)
    assert abs(work + heat) <= _CLOSURE * energy + 8.0 * T * noise
    assert all(leg.entropy_generated_si == 0.0 for leg in legs)


@every_material()
def test_carnot_cycle_closes_and_reaches_its_efficiency(material: Material) -> None:
    def run(example: tuple[lw.State, float, float]) -> list[lw.Path]:
        start, ratio, fall = example
        cold = lw.quantity(fall * start.si.T, "K")
        hot_leg = lw.Path.quasi_static(start, held="T", until={"v": ratio * start.v})
        expansion = lw.Path.quasi_static(hot_leg.end, held="s", until={"T": cold})
        cold_leg = lw.Path.quasi_static(expansion.end, held="T", until={"s": start.s})
        compression = lw.Path.quasi_static(cold_leg.end, held="s", until={"T": start.T})
        return [hot_leg, expansion, cold_leg, compression]

    def check(example: tuple[lw.State, float, float], legs: list[lw.Path]) -> None:
        start, _, fall = example
        _assert_closed(start, legs)
        assert np.isclose(legs[-1].end.si.p, start.si.p, rtol=1e-6)
        taken = float(legs[0].heat.magnitude)
        given = -sum(float(leg.work.magnitude) for leg in legs)
        _, energy = _scales(start)
        noise = float(start.fluid.noise_at(start.si.T, start.si.p))
        slack = _CLOSURE * energy + 8.0 * start.si.T * noise
        assert abs(given - (1.0 - fall) * taken) <= slack, "Carnot's efficiency, 1 - T_cold/T_hot"

    explore(
        f"Carnot, {material.name}",
        _corners(material=material),
        run,
        check,
        cost=max(1.0, material.cost / 1.5),
    )


@every_material()
def test_rectangle_of_pressure_and_volume_closes(material: Material) -> None:
    def run(example: tuple[lw.State, float, float]) -> list[lw.Path]:
        start, ratio, fall = example
        wide, low = (1.0 + (ratio - 1.0) / 10.0) * start.v, fall * start.p
        first = lw.Path.quasi_static(start, held="p", until={"v": wide})
        second = lw.Path.quasi_static(first.end, held="v", until={"p": low})
        third = lw.Path.quasi_static(second.end, held="p", until={"v": start.v})
        fourth = lw.Path.quasi_static(third.end, held="v", until={"p": start.p})
        return [first, second, third, fourth]

    def check(example: tuple[lw.State, float, float], legs: list[lw.Path]) -> None:
        start, ratio, fall = example
        _assert_closed(start, legs)
        given = -sum(float(leg.work.magnitude) for leg in legs)
        area = float(start.si.p * start.si.v) * (1.0 - fall) * (ratio - 1.0) / 10.0
        assert np.isclose(given, area, rtol=1e-9), "work is the area of the rectangle"

    explore(
        f"p-v rectangle, {material.name}",
        _corners(material=material),
        run,
        check,
        cost=max(1.0, material.cost / 1.5),
    )


@every_material()
def test_enthalpy_rises_by_t_ds_and_v_dp_around_a_rectangle(material: Material) -> None:
    """With g = h - T s: dg = -s dT at one pressure and v dp at one temperature."""

    def run(example: tuple[lw.State, float, float]) -> Any:
        start, ratio, fall = example
        T, p = float(start.si.T), float(start.si.p)
        T_cold, p_low = fall * T, p / ratio
        corners = start.fluid.state_si(
            ("T", "p"), np.array([T, T_cold, T_cold, T]), np.array([p, p, p_low, p_low])
        )
        if corners.failed:
            raise lw.StateNotFound(
                fluid=material.name, given="a corner", reason=str(corners.failed)
            )
        by_nodes = [
            np.array(
                [
                    -_integral(start, "s", (T, T_cold), p, nodes),
                    _integral(start, "v", (p, p_low), T_cold, nodes),
                    -_integral(start, "s", (T_cold, T), p_low, nodes),
                    _integral(start, "v", (p_low, p), T, nodes),
                ]
            )
            for nodes in (_FEW_NODES, _MANY_NODES)
        ]
        return corners, by_nodes

    def check(example: tuple[lw.State, float, float], found: Any) -> None:
        start, _, _ = example
        corners, (few, many) = found
        g = corners.si.h - corners.si.T * corners.si.s
        rises = np.roll(g, -1) - g
        _, energy = _scales(start)
        noise = np.max(start.fluid.noise_at(corners.si.T, corners.si.p))
        slack = 1e-9 * energy + 4.0 * start.si.T * noise + 10.0 * np.abs(few - many)
        assert np.all(np.abs(rises - many) <= slack), f"{rises - many} J/kg, slack {slack}"
        assert abs(np.sum(many)) <= np.sum(slack)

    explore(
        f"dh = T ds + v dp, {material.name}",
        _corners(material=material),
        run,
        check,
        cost=max(1.0, material.cost / 2.0),
    )


def _integral(
    start: lw.State, name: str, ends: tuple[float, float], held: float, nodes: int
) -> float:
    """Integral of s over T at one p, or of v over p (by ln p) at one T, by Gauss's rule."""
    places, weights = np.polynomial.legendre.leggauss(nodes)
    if name == "s":
        T = 0.5 * (ends[0] + ends[1]) + 0.5 * (ends[1] - ends[0]) * places
        values = start.fluid.state_si(("T", "p"), T, np.full(nodes, held)).si.s
        # The zero of s is large against its changes; taking it out keeps the digits.
        zero = float(start.si.s)
        whole = 0.5 * (ends[1] - ends[0]) * float(weights @ (values - zero))
        return whole + zero * (ends[1] - ends[0])
    logs = np.log(ends)
    p = np.exp(0.5 * (logs[0] + logs[1]) + 0.5 * (logs[1] - logs[0]) * places)
    values = start.fluid.state_si(("T", "p"), np.full(nodes, held), p).si.v * p
    return 0.5 * float(logs[1] - logs[0]) * float(weights @ values)
