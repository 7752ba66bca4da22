"""The noise of a model: the entropy that does not close, how much of it, and where."""

from __future__ import annotations

import pickle
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

import lostwork as lw
from lostwork.properties.noise_measurement import measured

HERE = lw.Region(T=("280 K", "380 K"), p=("1 bar", "50 bar"))
C, V, TO = 4184.0, 1e-3, 298.15


class Liquid(lw.PropertyModel):
    """Constant v and c: h = c (T - To) + v p and s = c ln(T / To), or what a test makes of them."""

    native_pairs = frozenset({("T", "p")})
    two_phase = False
    entropy_noise = 1e-10
    limits = lw.Limits(T_min=270.0, T_max=400.0, p_min=1e3, p_max=1e7)
    molar_mass = 0.018

    def __init__(self, change: Callable[..., tuple[object, object, object]] | None = None) -> None:
        self.change = change
        self.calls = 0

    def columns(self, pair: lw.Pair, x: lw.Column, y: lw.Column) -> lw.Columns:
        self.calls += 1
        T, p = np.asarray(x, dtype=float), np.asarray(y, dtype=float)
        v, h, s = V + 0.0 * T, C * (T - TO) + V * p, C * np.log(T / TO)
        if self.change is not None:
            v, h, s = self.change(T, p, v, h, s)
        columns = (T, p, v, h, s, np.full_like(T, np.nan))
        return lw.Columns(*(float(c) for c in columns)) if T.ndim == 0 else lw.Columns(*columns)


def noise_of(change=None, region=HERE, **more):
    """Measure a model past the fluids, so that every one is new."""
    return measured(object(), "test liquid", Liquid(change), region, 4, pure=True, **more)


def test_an_incompressible_liquid_in_closed_form_closes_to_round_off():
    noise = noise_of()
    assert {residual.kind for residual in noise.residuals} == {
        "one phase by (T, p)",
        "closed loops",
        "one phase by (p, h)",
        "one phase by (p, s)",
    }
    # The pairs with h and s are solved by the core, whose roots are good to 1e-12 of T.
    assert noise.worst.entropy < 2e-8
    by_loops = next(r for r in noise.residuals if r.kind == "closed loops")
    assert by_loops.entropy < 1e-10
    assert not by_loops.exceeds


@pytest.mark.parametrize(
    ("what", "change", "kinds"),
    [
        (
            "a volume that is one in a thousand too large",
            lambda T, p, v, h, s: (1.001 * v, h, s),
            {"one phase by (T, p)"},
        ),
        (
            "a volume that grows with T while h and s know nothing of it",
            lambda T, p, v, h, s: (v * (1.0 + 1e-4 * (T - TO)), h, s),
            {"one phase by (T, p)", "closed loops"},
        ),
        (
            "an entropy of another heat capacity",
            lambda T, p, v, h, s: (v, h, 1.00001 * s),
            {"one phase by (T, p)"},
        ),
        (
            "a heat capacity that falls with pressure in h alone",
            lambda T, p, v, h, s: (v, h - 1e-9 * p * (T - TO), s),
            {"one phase by (T, p)", "closed loops"},
        ),
    ],
)
def test_a_model_whose_h_v_and_s_are_of_different_equations_is_convicted(what, change, kinds):
    noise = noise_of(change)
    assert kinds <= {residual.kind for residual in noise.exceeding}, f"{what}: {noise}"
    assert noise.worst.exceeds


def test_a_datum_moved_by_any_constant_moves_no_noise():
    plain = noise_of()
    moved = noise_of(lambda T, p, v, h, s: (v, h - 1.6e7, s + 3.9e3))
    loops = [n.residuals[1].entropy for n in (plain, moved)]
    assert loops[1] == pytest.approx(loops[0], abs=1e-7)


def test_the_place_of_the_worst_is_told():
    def bump(T, p, v, h, s):
        return v, h, s + np.where(T > 360.0, 1e-3 * (T - 360.0), 0.0)

    worst = noise_of(bump).worst
    assert worst.T > 360.0
    assert worst.entropy == pytest.approx(1e-3 * 20.0, rel=0.35)


def test_a_row_that_fails_leaves_its_lines_out_and_says_why():
    class Frozen(Liquid):
        def columns(self, pair, x, y):
            found = super().columns(pair, x, y)
            T = np.atleast_1d(np.asarray(found.T))
            cold = np.flatnonzero(T < 300.0)
            named = {int(row): "it is solid there" for row in cold}
            s = np.where(T < 300.0, np.nan, np.atleast_1d(np.asarray(found.s)))
            return lw.Columns(found.T, found.p, found.v, found.h, s, found.quality, named)

    noise = measured(object(), "freezing liquid", Frozen(), HERE, 4, pure=True)
    first = noise.residuals[0]
    assert 0 < first.left_out < first.lines
    assert first.reason == "it is solid there"
    assert first.T > 300.0


def test_what_was_measured_once_is_kept_by_fluid_and_region():
    gas = lw.Fluid("nitrogen", backend="ideal-gas")
    again = lw.Fluid("nitrogen", backend="ideal-gas")
    assert gas.noise(HERE) is again.noise(lw.Region(T=("280 K", "380 K"), p=("1 bar", "5 MPa")))
    assert gas.noise(HERE) is not gas.noise(HERE, cells=3)


def test_a_fluid_told_of_more_noise_than_its_backend_states_has_wider_verdicts():
    gas = lw.Fluid("nitrogen", backend="ideal-gas")
    quiet = gas.noise(HERE)
    loud = lw.Noise("nitrogen", HERE, (replace(quiet.worst, entropy=2.0),))
    wary = gas.with_noise(loud)
    assert wary != gas
    assert wary.noise_at(300.0, 1e5) == 2.0
    assert pickle.loads(pickle.dumps(wary)) == wary
    site = lw.Surroundings(T="15 degC", p="1 bar")

    def throttled(fluid):
        inlet = lw.Stream(fluid.state(T="20 degC", p="2 bar"), rate="1 kg/s")
        return lw.process("throttling", inlet=inlet, p_out="1.99 bar").balance(site).verdict

    assert throttled(gas).status is lw.Status.possible
    assert throttled(wary).status is lw.Status.reversible
    assert throttled(wary).tolerance.to("W/K").magnitude >= 4.0


def test_a_region_compares_pickles_and_refuses_to_run_backwards():
    assert lw.Region(T=("6.85 degC", "380 K"), p=("100 kPa", "50 bar")) == HERE
    assert pickle.loads(pickle.dumps(HERE)) == HERE
    assert len({HERE, pickle.loads(pickle.dumps(HERE))}) == 1
    assert repr(HERE) == "Region(280 to 380 K, 1 to 50 bar)"
    with pytest.raises(lw.OutOfLimits, match="lowest to the highest"):
        lw.Region(T=("380 K", "280 K"), p=("1 bar", "50 bar"))
    with pytest.raises(lw.WrongDimension):
        lw.Region(T=("1 bar", "380 K"), p=("1 bar", "50 bar"))
    with pytest.raises(AttributeError):
        HERE.T = (1.0, 2.0)


def test_a_region_where_the_fluid_has_no_state_is_refused():
    gas = lw.Fluid("nitrogen", backend="ideal-gas")
    with pytest.raises(lw.OutOfLimits, match="no state could be followed"):
        gas.noise(lw.Region(T=("8000 K", "9000 K"), p=("1 bar", "2 bar")))


def test_a_measurement_prints_as_a_table_with_places():
    text = str(lw.Fluid("nitrogen", backend="ideal-gas").noise(HERE))
    assert "nitrogen, Region(280 to 380 K, 1 to 50 bar)" in text
    assert "one phase by (p, s)" in text
    assert "stated" in text
