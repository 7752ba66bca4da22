"""The loop test on the cubic equations: one phase, two phases, saturation."""

from __future__ import annotations

import pytest

import lostwork as lw


@pytest.mark.parametrize("eos", ["PR", "SRK"])
@pytest.mark.parametrize(
    ("fluid", "T", "p"),
    [
        ("nitrogen", ("300 K", "450 K"), ("1 bar", "60 bar")),
        ("propane", ("230 K", "360 K"), ("1 bar", "30 bar")),
        ("water", ("300 K", "600 K"), ("0.5 bar", "80 bar")),
        (
            {"methane": 0.92, "ethane": 0.05, "propane": 0.03},
            ("150 K", "220 K"),
            ("5 bar", "30 bar"),
        ),
        ({"propane": 0.5, "isobutane": 0.5}, ("250 K", "350 K"), ("1 bar", "15 bar")),
    ],
    ids=str,
)
def test_fluids_by_a_cubic_equation_close_to_what_is_stated(fluid, T, p, eos):
    # Two phases of a mixture take a flash a point, so it is followed along fewer lines.
    cells = 3 if isinstance(fluid, str) else 1
    noise = lw.Fluid(fluid, backend="cubic", eos=eos).noise(lw.Region(T=T, p=p), cells=cells)
    assert not noise.exceeding, str(noise)
    assert len(noise.residuals) >= 5
