"""Steps against a constant load come the closer to the quasi-static path the more there are."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from _exploring import explore
from _materials import Material, every_material
from hypothesis import assume, settings
from hypothesis import strategies as st

import lostwork as lw

_STEPS = (8, 16, 32, 64, 128, 256)
_SLOW = 2.0
_DOUBLINGS_OF_SLOW_MODELS = 4
_STARTS = 3


def _steps_of(material: Material) -> tuple[int, ...]:
    """Slow models run fewer steps but at night; the order shows in them all the same."""
    profile = settings.get_current_profile_name()
    if material.cost <= _SLOW or profile == "nightly":
        return _STEPS
    return _STEPS[:_DOUBLINGS_OF_SLOW_MODELS]


@st.composite
def _starts(draw: st.DrawFn, /, *, material: Material) -> tuple[lw.State, Any]:
    """Hot gas at a few starting points at once, and a ratio of pressures for each."""
    low, high = material.T
    kelvin = st.integers(round(0.6 * high + 0.4 * low), round(0.95 * high)).map(float)
    rise = st.integers(0, 100).map(
        lambda n: material.p[0] * (0.2 * 2e6 / material.p[0]) ** (n / 100)
    )
    ratio = st.integers(15, 40).map(lambda n: n / 10)
    T, p, ratios = (
        np.array(draw(st.lists(s, min_size=_STARTS, max_size=_STARTS)))
        for s in (kelvin, rise, ratio)
    )
    return material.fluid.state_si(("T", "p"), T, 4.0 * p), ratios


@every_material()
@pytest.mark.parametrize("held", ["T", "adiabatic"])
@pytest.mark.parametrize("direction", ["expansion", "compression"])
@pytest.mark.parametrize("spacing", ["ratio", "decrement"])
def test_shortfall_falls_as_one_over_the_number_of_steps(
    material: Material, held: str, direction: str, spacing: str
) -> None:
    def run(example: tuple[lw.State, Any]) -> tuple[lw.Path, dict[int, lw.Path]]:
        start, ratio = example
        p_end = start.si.p * ratio ** (-1.0 if direction == "expansion" else 1.0)
        end = lw.quantity(p_end, "Pa")
        slow = lw.Path.quasi_static(start, held="T" if held == "T" else "s", until={"p": end})
        sudden = {
            n: lw.Path.stepwise(
                start,
                p_end=end,
                steps=n,
                spacing=spacing,  # type: ignore[arg-type]
                held="T" if held == "T" else None,
            )
            for n in _steps_of(material)
        }
        return slow, sudden

    def check(example: Any, paths: tuple[lw.Path, dict[int, lw.Path]]) -> None:
        slow, sudden = paths
        counts = np.array(list(sudden))
        taken = np.stack([path.work.magnitude for path in sudden.values()])
        short = np.stack([path.shortfall(slow).work.magnitude for path in sudden.values()])
        made = np.stack([path.entropy_generated_si for path in sudden.values()])
        # Few sudden steps run hotter than many, and may leave the range of a model.
        followed = np.isfinite(short).all(axis=0)
        assume(followed.any())
        taken, short, made = taken[:, followed], short[:, followed], made[:, followed]
        assert np.all(np.diff(taken, axis=0) < 0.0), "more steps must give more work, or take less"
        assert np.all(short > 0.0), "no number of steps beats the quasi-static path"
        assert np.all(made > 0.0)
        assert np.all(np.diff(made, axis=0) < 0.0)
        order = -np.polyfit(np.log(counts), np.log(short), 1)[0]
        assert np.all((order >= 0.9) & (order <= 1.1)), f"order {order}, shortfalls {short}"
        if held == "T":
            lost = slow.start.si.T[followed] * made
            assert np.allclose(lost, short, rtol=1e-5), "T sigma is the shortfall at one T"

    label = f"steps, {direction}, {held}, {spacing}, {material.name}"
    slow_down = 3.0 if material.cost <= _SLOW else 12.0
    explore(label, _starts(material=material), run, check, cost=slow_down)
