"""Nothing changes on the way through a pickle or in another thread."""

from __future__ import annotations

import pickle
from concurrent.futures import ThreadPoolExecutor
from typing import Any

import numpy as np
import pytest
from _exploring import explore
from _materials import MATERIALS, Material, every_material
from _recipes import RECIPES, Hand, applicable, legal_fields
from _soundness import slack_of
from hypothesis import strategies as st

import lostwork as lw
from lostwork.testing import surroundings

_THREADS = 4


def _copied(value: Any) -> Any:
    return pickle.loads(pickle.dumps(value))


@st.composite
def _matter(draw: st.DrawFn, /, *, material: Material) -> tuple[lw.State, lw.Stream, lw.Content]:
    hand = Hand(draw, material, draw(st.sampled_from((None, 3))))
    state = hand.state()
    elevation = lw.quantity(float(draw(st.integers(0, 50))), "m")
    return state, hand.stream(state, elevation=elevation), hand.charge(state)


@every_material()
def test_fluids_states_streams_and_contents_survive_a_pickle(material: Material) -> None:
    def run(example: Any) -> Any:
        return _copied(example)

    def check(example: Any, copies: Any) -> None:
        state, stream, content = example
        state_copy, stream_copy, content_copy = copies
        assert state_copy == state
        assert hash(state_copy) == hash(state)
        assert state_copy.fluid == material.fluid
        assert _copied(material.fluid) == material.fluid
        assert stream_copy.state == state
        assert np.array_equal(stream_copy.mass_si, stream.mass_si)
        assert np.array_equal(stream_copy.si.mechanical, stream.si.mechanical)
        assert (stream_copy.name, stream_copy.per_time) == (stream.name, stream.per_time)
        assert content_copy.state == state
        assert np.array_equal(content_copy.mass_si, content.mass_si)
        assert content_copy.name == content.name
        given = lw.GivenState(h=state.h, s=state.s, p=state.p, v=state.v, datum="mine")
        again = _copied(given)
        assert np.array_equal(again.si.h, given.si.h)
        assert np.array_equal(again.si.u, given.si.u)
        assert again.datum == given.datum

    explore(f"pickles, {material.name}", _matter(material=material), run, check, cost=material.cost)


@pytest.mark.parametrize("kind", RECIPES)
def test_processes_and_balances_survive_a_pickle(kind: str) -> None:
    quick = [m for m in MATERIALS if m.cost < 5.0 and applicable(kind, m)]

    def run(example: Any) -> tuple[lw.Process, lw.Balance]:
        fields, site = example
        step = lw.process(kind, **fields)
        return step, step.balance(site)

    def check(example: Any, made: tuple[lw.Process, lw.Balance]) -> None:
        (step, balance), (_, site) = made, example
        unsolved = _copied(lw.process(kind, **example[0])).balance(site)
        for again in (_copied(step).balance(site), _copied(balance), unsolved):
            # A flash may start from its neighbours, and so end in another last digit.
            assert again.work_lost_si == pytest.approx(
                balance.work_lost_si, rel=1e-8, abs=float(slack_of(balance))
            )
            assert again.verdict.status == balance.verdict.status
            assert again.exergy_destroyed.magnitude == pytest.approx(
                balance.exergy_destroyed.magnitude, rel=1e-8, abs=float(slack_of(balance))
            )
            assert list(again.losses_si) == list(balance.losses_si)
            assert (again.efficiency is None) == (balance.efficiency is None)

    strategy = st.sampled_from(quick).flatmap(
        lambda material: st.tuples(legal_fields(kind=kind, material=material), surroundings())
    )
    explore(f"pickles, {kind}", strategy, run, check, cost=4.0)


@every_material()
def test_threads_find_the_same(material: Material) -> None:
    def found(state: lw.State) -> tuple[float, ...]:
        h, s, p = state.si.h, state.si.s, state.si.p
        lower = state.fluid.state_si(("p", "h"), 0.9 * p, h).si
        higher = state.fluid.state_si(("p", "s"), 1.1 * p, s).si
        return (float(lower.T), float(lower.s), float(higher.T), float(higher.h))

    def run(example: list[lw.State]) -> list[tuple[float, ...]]:
        return [found(state) for state in example]

    def check(example: list[lw.State], alone: list[tuple[float, ...]]) -> None:
        with ThreadPoolExecutor(_THREADS) as threads:
            together = list(threads.map(found, example * _THREADS))
        for place, row in enumerate(together):
            assert np.allclose(row, alone[place % len(alone)], rtol=1e-9, atol=0.0)

    @st.composite
    def gases(draw: st.DrawFn) -> lw.State:
        return Hand(draw, material).gas()

    explore(
        f"threads, {material.name}",
        st.lists(gases(), min_size=2, max_size=5),
        run,
        check,
        cost=1.5 * material.cost,
        least_accepted=0.8,
    )
