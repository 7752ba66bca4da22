"""The steps of a chain lose together what the balance drawn around all of them loses."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from _exploring import explore
from _materials import Material, every_material
from _recipes import Hand
from hypothesis import strategies as st

import lostwork as lw
from lostwork.testing import surroundings


@dataclass(frozen=True)
class _Chain:
    """A compressor, a cooler, a splitter, a valve in each branch and a mixer, against a site."""

    feed: lw.Stream
    pressure_ratio: float
    efficiency: float
    cooled_by: float
    share: float
    branch_ratios: tuple[float, float]
    site: lw.Surroundings
    order: tuple[int, ...]

    def balances(self) -> list[lw.Balance]:
        T_in = float(self.feed.state.si.T)
        compressor = lw.process(
            "compression",
            name="compressor",
            inlet=self.feed,
            pressure_ratio=self.pressure_ratio,
            isentropic_efficiency=self.efficiency,
        )
        T_hot = float(compressor.outlet.state.si.T)
        T_cool = T_hot - self.cooled_by * (T_hot - T_in)
        cooler = lw.process(
            "cooling",
            name="cooler",
            inlet=compressor.outlet,
            T_out=lw.quantity(T_cool, "K"),
            at=lw.quantity(T_cool - 5.0, "K"),
        )
        splitter = lw.process(
            "splitting",
            name="splitter",
            inlet=cooler.outlet,
            fractions={"a": self.share, "b": 1.0 - self.share},
        )
        p = float(cooler.outlet.state.si.p)
        valves = [
            lw.process(
                "throttling",
                name=f"valve {branch}",
                inlet=splitter.outlets[branch],
                p_out=lw.quantity(p / ratio, "Pa"),
            )
            for branch, ratio in zip("ab", self.branch_ratios, strict=True)
        ]
        mixer = lw.process("mixing", name="mixer", inflows=tuple(v.outlet for v in valves))
        steps = [compressor, cooler, splitter, *valves, mixer]
        return [steps[place].balance(self.site) for place in self.order]


@st.composite
def _chains(draw: st.DrawFn, /, *, material: Material) -> _Chain:
    hand = Hand(draw, material)
    tenths = st.integers(10, 40).map(lambda n: n / 10)
    low, high = material.T
    T = draw(st.integers(round(0.6 * low + 0.4 * high), round(0.3 * low + 0.7 * high)))
    first, last = max(material.p[0], 5e4), min(material.p[1], 1e6)
    p = first * (last / first) ** (draw(st.integers(0, 20)) / 20.0)
    state = material.fluid.state_si(("T", "p"), float(T), p)
    return _Chain(
        feed=hand.stream(state),
        pressure_ratio=draw(tenths),
        efficiency=draw(st.integers(40, 100)) / 100,
        cooled_by=draw(st.integers(1, 10)) / 10,
        share=draw(st.integers(1, 9)) / 10,
        branch_ratios=(draw(tenths), draw(tenths)),
        site=draw(surroundings()),
        order=tuple(draw(st.permutations(range(6)))),
    )


@every_material()
def test_parts_of_a_chain_sum_to_the_whole(material: Material) -> None:
    def run(chain: _Chain) -> lw.Audit:
        return lw.Audit(chain.balances())

    def check(chain: _Chain, audit: lw.Audit) -> None:
        whole = audit.whole
        assert whole is not None
        assert len(audit.links) == 6
        assert not any(link.mismatch for link in audit.links)
        T0 = chain.site.si.T
        entropy = float(chain.feed.mass_si) * lw.R / material.fluid.molar_mass_si
        tolerance = sum(float(b.verdict.tolerance_si) for b in audit.balances)
        slack = 1e-9 * entropy * T0 + T0 * tolerance
        assert abs(whole.work_lost_si - audit.work_lost_si) <= slack
        parts = sum(b.work_total.magnitude for b in audit.balances)
        assert np.isclose(whole.work_total.magnitude, parts, rtol=1e-12, atol=0.0)
        assert abs(sum(audit.losses_si.values()) - audit.work_lost_si) <= slack
        assert audit.acceptable
        ranking = audit.ranking()
        assert [r.work_lost for r in ranking] == sorted(
            (r.work_lost for r in ranking), reverse=True
        )
        shares = [r.share for r in ranking]
        if audit.work_lost_si > 0.0:
            assert np.isclose(sum(shares), 1.0)
        else:
            assert np.isnan(shares).all(), "nothing has no shares"
        rows = {b.name: b.work_lost_si for b in audit.balances}
        assert {r.name: r.work_lost for r in ranking} == rows

    explore(
        f"chains, {material.name}",
        _chains(material=material),
        run,
        check,
        cost=1.5 * material.cost,
        least_accepted=0.8,
    )
