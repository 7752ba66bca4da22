"""One case under several backends: what moves, which verdicts change, who could not do it."""

from __future__ import annotations

import pytest

import lostwork as lw

CASE = """
[case]
title = "Let-down"
backend = "ideal-gas"
[surroundings]
T = "15 degC"
p = "1 bar"
[fluids.gas]
components = "nitrogen"
[streams.feed]
fluid = "gas"
T = "20 degC"
p = "200 bar"
rate = "2 kg/s"
[steps.valve]
type = "throttling"
inlet = "feed"
p_out = "20 bar"
[steps.cooler]
type = "throttling"
inlet = "valve"
p_out = "2 bar"
"""

STEAM = CASE.replace('"nitrogen"', '"water"').replace('T = "20 degC"', "quality = 1.0")


class Claimed:
    """A host program's own case, whose one step loses what the backend says it does."""

    title = "claimed"

    def __init__(self, s_out=None):
        self.s_out = s_out

    def with_backend(self, backend):
        return Claimed({"tight": 995.0, "loose": 1010.0, "exact": 1000.0}[backend])

    def audit(self, progress=None):
        given = [lw.GivenState(h="500 kJ/kg", s=f"{s} J/kg/K") for s in (1000.0, self.s_out)]
        inlet, outlet = (lw.Stream(state, rate="2 kg/s") for state in given)
        site = lw.Surroundings(T="300 K", p="1 bar")
        step = lw.Balance(name="valve", inflows=[inlet], outflows=[outlet], surroundings=site)
        return lw.Audit([step])


def test_each_backend_gives_its_own_figures_and_the_spread_between_them():
    comparison = lw.compare(lw.Case.parse(CASE), ["ideal-gas", "cubic", "coolprop"])
    assert comparison.backends == ("ideal-gas", "cubic", "coolprop")
    valve = comparison.steps[0]
    lost = [valve.figures[name].work_lost for name in comparison.backends]
    assert len(set(lost)) == 3
    assert valve.spread == pytest.approx(max(lost) - min(lost))
    assert 0.0 < valve.relative_spread < 0.3
    assert not comparison.changed
    assert comparison.acceptable


def test_the_figures_are_those_of_the_case_written_for_that_backend():
    comparison = lw.compare(lw.Case.parse(CASE), ["cubic", "ideal-gas"])
    alone = lw.Case.parse(CASE.replace('"ideal-gas"', '"cubic"')).audit()
    assert comparison.totals["cubic"] == pytest.approx(float(alone.work_lost_si), rel=1e-12)


def test_a_backend_that_cannot_compute_the_case_is_kept_with_its_reason():
    comparison = lw.compare(lw.Case.parse(STEAM), ["ideal-gas", "coolprop"])
    assert comparison.backends == ("coolprop",)
    reason = str(comparison.failures["ideal-gas"])
    assert "[streams.feed] p and quality" in reason
    assert "without a liquid" in reason
    assert "ideal-gas could not compute it" in str(comparison)


def test_where_no_backend_can_the_reasons_of_all_are_raised():
    with pytest.raises(lw.AuditError, match=r"ideal-gas: .*without a liquid") as raised:
        lw.compare(lw.Case.parse(STEAM), ["ideal-gas"])
    assert isinstance(raised.value.__cause__, lw.CaseError)


def test_verdicts_that_hang_on_the_backend_are_named():
    comparison = lw.compare(Claimed(), ["tight", "loose", "exact"])
    (step,) = comparison.changed
    assert [figures.status for figures in step.figures.values()] == [
        lw.Status.impossible,
        lw.Status.possible,
        lw.Status.reversible,
    ]
    assert not comparison.acceptable
    assert "impossible (tight), possible (loose)" in str(comparison)


def test_work_lost_of_a_given_step_is_T0_times_the_entropy_it_generates():
    comparison = lw.compare(Claimed(), ["tight", "loose"])
    figures = comparison.steps[0].figures
    # 2 kg/s that gain 10 J/kg/K (or lose 5) against 300 K.
    assert figures["loose"].entropy_generated == pytest.approx(20.0)
    assert figures["loose"].work_lost == pytest.approx(6000.0)
    assert figures["tight"].work_lost == pytest.approx(-3000.0)
    assert comparison.steps[0].spread == pytest.approx(9000.0)
    assert comparison.steps[0].relative_spread == pytest.approx(2.0)


def test_a_row_for_each_step_and_backend_is_handed_to_exporters():
    rows = lw.compare(lw.Case.parse(CASE), ["ideal-gas", "cubic"]).rows()
    assert [(row["step"], row["backend"]) for row in rows] == [
        ("valve", "ideal-gas"),
        ("valve", "cubic"),
        ("cooler", "ideal-gas"),
        ("cooler", "cubic"),
    ]
    assert all(row["verdict"] == "possible" for row in rows)


def test_the_printed_comparison_lines_up():
    lines = str(lw.compare(lw.Case.parse(CASE), ["ideal-gas", "cubic"])).splitlines()
    assert lines[0] == "Let-down: work lost in kW, by backend"
    assert lines[1].split() == ["step", "ideal-gas", "cubic", "spread", "%", "verdict"]
    ends = {line.index("possible") for line in lines[2:4]}
    assert len(ends) == 1


@pytest.mark.parametrize("names", [[], ["cubic", "cubic"]])
def test_backends_to_compare_are_named_once(names):
    with pytest.raises(lw.AuditError, match="expected different backends"):
        lw.compare(lw.Case.parse(CASE), names)


def test_a_name_of_no_backend_is_a_mistake_of_the_caller():
    with pytest.raises(lw.PluginNotFound, match="guesswork"):
        lw.compare(lw.Case.parse(CASE), ["ideal-gas", "guesswork"])


def test_a_disagreement_of_two_routes_is_never_kept_as_a_mere_failure():
    class Defective(Claimed):
        def with_backend(self, backend):
            return self

        def audit(self, progress=None):
            raise lw.InternalDisagreement(what="exergy destroyed", first="1 W", second="2 W")

    with pytest.raises(lw.InternalDisagreement):
        lw.compare(Defective(), ["tight", "loose"])


def test_progress_says_which_backend_is_at_work():
    told = []
    lw.compare(
        lw.Case.parse(CASE),
        ["ideal-gas", "cubic"],
        progress=lambda done, total, what: told.append(what),
    )
    assert told[0] == "ideal-gas: fluid gas"
    assert told[-1] == "cubic: step cooler"
