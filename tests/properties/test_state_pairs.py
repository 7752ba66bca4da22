"""A state found again from any two of its properties, by the backend and by the core's solver."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest
from _exploring import explore
from _materials import Material, every_material
from _recipes import Hand
from hypothesis import strategies as st

import lostwork as lw
from lostwork.properties.pairs import solve_pair
from lostwork.properties.state import SiState

_REFUSED_PAIRS = (
    ("T", "h"),
    ("T", "u"),
    ("h", "u"),
    ("v", "quality"),
    ("h", "quality"),
    ("s", "quality"),
    ("u", "quality"),
)
_DRY_PAIRS = tuple(sorted(pair for pair in lw.DETERMINING_PAIRS if "quality" not in pair))

_ACCURACY = {"ideal-gas": 1e-9, "coolprop": 1e-7, "cubic": 1e-7}
"""Entropy (of R) and enthalpy (of R T) within which a state is found again, by backend."""


@st.composite
def _states(draw: st.DrawFn, /, *, material: Material) -> lw.State:
    """Gas, liquid or wet, as far as the material knows them."""
    hand = Hand(draw, material)
    if material.two_phases and hand.one_of(False, False, True):
        return hand.liquid()
    return hand.state()


@dataclass(frozen=True)
class _OnlyByTemperatureAndPressure:
    """A model that leaves every pair to the core but those it must offer itself."""

    model: Any

    @property
    def native_pairs(self) -> frozenset[tuple[str, str]]:
        kept = {("T", "p"), ("T", "quality"), ("p", "quality")}
        return frozenset(self.model.native_pairs & kept)

    def __getattr__(self, name: str) -> Any:
        return getattr(self.model, name)


def _assert_found_again(state: lw.State, found: SiState, what: str, *, accuracy: float) -> None:
    """Compare what is well conditioned: T, s and h, v, and p by the work v dp that it stands for.

    The pressure of a liquid answers to the ninth digit of its volume; v (p2 - p1) of R T does not.
    By s and u, du = -p dv: that is blind to the pressure of a liquid, which is then found as far as
    the digits of u reach.
    """
    si, entropy = state.si, lw.R / state.fluid.molar_mass_si
    energy = entropy * si.T
    noise = float(state.fluid.noise_at(si.T, si.p)) / entropy
    bound = accuracy + 10.0 * noise
    apart = {
        "T": abs(found.T / si.T - 1.0),
        "v": abs(found.v / si.v - 1.0) * min(1.0, si.p * si.v / energy),
        "s": abs(found.s - si.s) / entropy,
        "h": abs(found.h - si.h) / energy,
        "p": si.v * abs(found.p - si.p) / energy,
    }
    bounds = dict.fromkeys(apart, bound)
    if what.endswith("s and u"):
        blind = bound + _unseen_pressure(state) * si.v / energy
        bounds |= {"p": blind, "h": blind, "T": blind}
    assert all(apart[name] <= bounds[name] for name in apart), f"{what} of {state!r}: {apart}"


def _unseen_pressure(state: lw.State) -> float:
    """Change of pressure at constant s that moves u by no more than its noise."""
    si = state.si
    pressed = state.fluid.state_si(("p", "s"), 1.1 * si.p, si.s).si
    answer = abs(pressed.u - si.u) / (0.1 * si.p)
    digits = 64.0 * np.finfo(float).eps * (abs(si.u) + si.T * abs(si.s))
    noise = si.T * float(state.fluid.noise_at(si.T, si.p))
    return float((digits + noise) / answer)


@every_material()
def test_state_is_found_again_from_any_pair(material: Material) -> None:
    def run(state: lw.State) -> list[tuple[str, lw.State]]:
        wet = np.isfinite(state.si.quality) and 0.0 < state.si.quality < 1.0
        found = []
        for pair in _DRY_PAIRS:
            if pair == ("T", "p") and np.isfinite(state.si.quality):
                continue
            if wet and material.pseudo_pure:
                continue
            found.append((" and ".join(pair), _again(state, pair)))
        if np.isfinite(state.si.quality) and not material.mixture:
            for pair in (("T", "quality"), ("p", "quality")):
                found.append((" and ".join(pair), _again(state, pair)))
        return found

    def check(state: lw.State, found: list[tuple[str, lw.State]]) -> None:
        for what, again in found:
            _assert_found_again(state, again.si, what, accuracy=_ACCURACY[material.backend])

    explore(
        f"pairs, {material.name}",
        _states(material=material),
        run,
        check,
        cost=1.5 * material.cost,
        least_accepted=0.9,
    )


@every_material(lambda material: not material.pseudo_pure)
def test_core_solves_every_pair_from_temperature_and_pressure(material: Material) -> None:
    """Where (T, p) has no gap: a pseudo-pure fluid has one in its dome, and solves these itself."""
    fluid = material.fluid
    backend = lw.plugins().backend(material.backend).load()()
    model = _OnlyByTemperatureAndPressure(backend.open(fluid.spec, dict(material.options)))
    h0, s0 = _zeros(material)

    def run(example: tuple[lw.State, lw.Pair]) -> Any:
        state, pair = example
        zero = {"h": h0, "u": h0, "s": s0}
        x, y = (getattr(state.si, name) - zero.get(name, 0.0) for name in pair)
        columns = solve_pair(model, pair, float(x), float(y), pure=fluid.is_pure)
        assert not columns.failed, f"{pair} of {state!r}: {columns.failed}"
        return columns

    def check(example: tuple[lw.State, lw.Pair], columns: Any) -> None:
        state, pair = example
        found = lw.State(fluid, _si_of(columns, h0, s0), {})
        what = "the core by " + " and ".join(pair)
        _assert_found_again(state, found.si, what, accuracy=1e-6)

    solved = [pair for pair in _DRY_PAIRS if pair != ("T", "p")]
    dry = _states(material=material).filter(lambda state: not np.isfinite(state.si.quality))
    explore(
        f"core pairs, {material.name}",
        st.tuples(dry, st.sampled_from(solved)),
        run,
        check,
        cost=max(1.0, material.cost / 2.0),
        least_accepted=0.9,
    )


@every_material(lambda material: material.cost < 5.0)
@pytest.mark.parametrize("pair", _REFUSED_PAIRS, ids=" and ".join)
def test_refused_pair_names_a_pair_that_works(material: Material, pair: tuple[str, str]) -> None:
    state = material.fluid.state(T="400 K", p="1 bar")
    values = {name: getattr(state, name) for name in pair}
    if "quality" in values:
        values["quality"] = 0.5
    with pytest.raises(lw.PairRefused) as refused:
        material.fluid.state(**values)
    offers = _offers(refused.value.instead)
    assert offers, f"{refused.value} names no pair"
    for offered in offers:
        if "quality" not in offered:
            again = material.fluid.state(**{name: getattr(state, name) for name in offered})
            assert again.isclose(state, relative=1e-6)
        elif material.two_phases and not material.pseudo_pure:
            wet = material.fluid.state(p="10 bar", quality=0.5)
            again = material.fluid.state(**{name: getattr(wet, name) for name in offered})
            assert again.isclose(wet, relative=1e-6)


def _offers(words: str) -> list[tuple[str, str]]:
    """Pairs that a refusal names, as in "Give p with h, or T with p, v or s"."""
    known = {"T", "p", "v", "h", "s", "u", "quality"}
    offers = []
    for part in re.split(r"Give|,? or (?=\w+ with)", words):
        before, _, after = part.partition(" with ")
        firsts = [name for name in re.findall(r"\w+", before) if name in known]
        seconds = [name for name in re.findall(r"\w+", after) if name in known]
        offers += [(first, second) for first in firsts for second in seconds]
    return offers


def _again(state: lw.State, pair: lw.Pair) -> lw.State:
    return state.fluid.state_si(pair, getattr(state.si, pair[0]), getattr(state.si, pair[1]))


def _zeros(material: Material) -> tuple[float, float]:
    """What the common datum adds to h and s of the model."""
    fluid = material.fluid
    T, p = material.T[1], material.p[0]
    common = fluid.state_si(("T", "p"), T, p).si
    backend = lw.plugins().backend(material.backend).load()()
    own = backend.open(fluid.spec, dict(material.options)).columns(("T", "p"), T, p)
    return float(common.h - own.h), float(common.s - own.s)


def _si_of(columns: Any, h0: float, s0: float) -> SiState:
    return SiState(columns.T, columns.p, columns.v, columns.h + h0, columns.s + s0, columns.quality)
