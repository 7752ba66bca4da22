"""What goes round comes back: cycles of reversible paths, and dh = T ds + v dp on the way."""

from __future__ import annotations

import numpy as np
from _exploring import explore
from _materials import Material, every_material
from hypothesis import strategies as st

import lostwork as lw

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


@every_material(lambda material: material.cost < 10.0)
def test_enthalpy_rises_by_t_ds_and_v_dp_around_a_rectangle(material: Material) -> None:
    """By the instrument that is shipped, which parts its lines at saturation."""

    def run(example: tuple[lw.State, float, float]) -> lw.Noise:
        start, ratio, fall = example
        T, p = float(start.si.T), float(start.si.p)
        region = lw.Region(
            T=(lw.quantity(fall * T, "K"), lw.quantity(T, "K")),
            p=(lw.quantity(p / ratio, "Pa"), lw.quantity(p, "Pa")),
        )
        return start.fluid.noise(region, cells=1)

    def check(example: tuple[lw.State, float, float], noise: lw.Noise) -> None:
        assert not noise.exceeding, str(noise)

    explore(
        f"dh = T ds + v dp, {material.name}",
        _corners(material=material),
        run,
        check,
        cost=1.5 * material.cost,
    )
