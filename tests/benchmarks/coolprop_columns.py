"""Columns of the backend "coolprop" against the bare library, which does the same rows one by one.

    python tests/benchmarks/coolprop_columns.py [fluids | mixtures]

Each line is one case in one run: both sides take turns, medians of five, and the spread of the bare
library's five times (half of largest less smallest, over the median) is the noise of the machine.
The bare library is a loop over its low-level object that reads T, p, density, h, s and quality; a
mixture is timed on a sample of its rows, once.  The last columns are the worst errors against the
states that the columns were made from: of T (relative) and of s (J/kg/K), ours and the library's.
Through the dome these states are single points of the library itself.
"""

from __future__ import annotations

import statistics
import sys
import time
from collections.abc import Callable
from functools import cache
from typing import Any

import CoolProp
import numpy as np
import numpy.typing as npt

import lostwork as lw
from lostwork_plugins.coolprop.backend import CoolPropBackend

Array = npt.NDArray[np.float64]
INPUTS = {"T": CoolProp.PT_INPUTS, "h": CoolProp.HmassP_INPUTS, "s": CoolProp.PSmass_INPUTS}
NAMES = ("T", "p", "v", "h", "s", "quality")
ROWS, MIXTURE_ROWS, SAMPLE, ROUNDS = 5000, 1000, 4, 5

FLUIDS = {
    "nitrogen": ("nitrogen", (250.0, 400.0), (60e5, 60e5)),
    "nitrogen, p rising": ("nitrogen", (200.0, 400.0), (10e5, 100e5)),
    "liquid water": ("water", (300.0, 420.0), (50e5, 50e5)),
    "steam, p rising": ("water", (600.0, 900.0), (20e5, 100e5)),
    "carbon dioxide, dense": ("carbon dioxide", (320.0, 500.0), (100e5, 150e5)),
    "carbon dioxide, liquid": ("carbon dioxide", (230.0, 280.0), (70e5, 90e5)),
    "propane vapour": ("propane", (330.0, 450.0), (5e5, 9e5)),
    "R134a vapour": ("R134a", (300.0, 400.0), (1e5, 5e5)),
}
DOMES = ("nitrogen", "water", "carbon dioxide", "propane", "R134a", "ammonia")
# The composition of the natural gas is invented.
MIXTURES: dict[str, tuple[dict[str, float], tuple[float, float], tuple[float, float]]] = {
    "air by composition": (
        {"nitrogen": 0.7812, "oxygen": 0.2096, "argon": 0.0092},
        (250.0, 400.0),
        (20e5, 80e5),
    ),
    "gas of 8 components": (
        {
            "methane": 0.85,
            "ethane": 0.06,
            "propane": 0.03,
            "butane": 0.01,
            "isobutane": 0.01,
            "nitrogen": 0.02,
            "carbon dioxide": 0.015,
            "pentane": 0.005,
        },
        (290.0, 400.0),
        (20e5, 80e5),
    ),
}


def bare(state: Any, name: str, p: Array, y: Array) -> Array:
    """Rows of the library itself; NaN where it gives up."""
    inputs, rows = INPUTS[name], []
    swapped = name == "h"
    for first, second in zip(p.tolist(), y.tolist(), strict=True):
        try:
            state.update(inputs, *((second, first) if swapped else (first, second)))
            rows.append(
                (state.T(), state.p(), state.rhomass(), state.hmass(), state.smass(), state.Q())
            )
        except ValueError:
            rows.append((np.nan,) * 6)
    return np.array(rows)


def turns(ours: Callable[[], Any], library: Callable[[], Any]) -> tuple[Any, Any, list[float]]:
    """Run both sides in turn; their answers, and median, median, spread of the library."""
    times: tuple[list[float], list[float]] = ([], [])
    answers: list[Any] = [None, None]
    for _ in range(ROUNDS):
        for side, run in enumerate((library, ours)):
            start = time.perf_counter()
            answers[side] = run()
            times[side].append(time.perf_counter() - start)
    middle = [statistics.median(values) for values in times]
    spread = (max(times[0]) - min(times[0])) / (2 * middle[0])
    return answers[1], answers[0], [*middle, spread]


def fluid_case(title: str, fluid: str, name: str, p: Array, y: Array, made: lw.Columns) -> None:
    """Print one line on a pure fluid."""
    model = model_of(fluid)
    state = CoolProp.AbstractState("HEOS", model.fluid)  # type: ignore[attr-defined]
    column, rows, (raw, mine, spread) = turns(
        lambda: model.columns(("p", name), p, y), lambda: bare(state, name, p, y)
    )
    assert not column.failed
    errors = [
        float(np.nanmax(np.abs(values)))
        for values in (
            column.T / made.T - 1,
            rows[:, 0] / made.T - 1,
            column.s - made.s,
            rows[:, 4] - made.s,
        )
    ]
    print(
        f"{title:34} (p, {name})  {raw / p.size * 1e6:7.1f} {mine / p.size * 1e6:6.2f} us  "
        f"{raw / mine:6.1f} x  noise {spread:4.0%}   T {errors[0]:.0e} {errors[1]:.0e}  "
        f"s {errors[2]:.0e} {errors[3]:.0e}"
    )


@cache
def model_of(fluid: str) -> lw.PropertyModel:
    """Model of a pure fluid, on the zero of the library."""
    return CoolPropBackend().open(lw.Fluid(fluid, backend="coolprop").spec, {})


def one_by_one(model: lw.PropertyModel, p: Array, h: Array) -> lw.Columns:
    """Single points, which the backend asks of the library one at a time."""
    rows = [model.columns(("p", "h"), *row) for row in zip(p.tolist(), h.tolist(), strict=True)]
    columns = (np.array([getattr(row, name) for row in rows]) for name in NAMES)
    T, p, v, h, s, quality = columns
    return lw.Columns(T, p, v, h, s, quality)


def fluids() -> None:
    """Single-phase lines in order and shuffled, columns through the dome, and a single point."""
    rng = np.random.default_rng(3)
    for title, (fluid, (T_low, T_high), (p_low, p_high)) in FLUIDS.items():
        T, p = np.linspace(T_low, T_high, ROWS), np.linspace(p_low, p_high, ROWS)
        for order in ("", ", random"):
            if order:
                T, p = rng.uniform(T_low, T_high, ROWS), rng.uniform(p_low, p_high + 1e5, ROWS)
            made = model_of(fluid).columns(("T", "p"), T, p)
            for name in ("h", "s"):
                fluid_case(title + order, fluid, name, p, np.asarray(getattr(made, name)), made)
    for fluid in DOMES:
        model = model_of(fluid)
        T_c, p_c = model.critical().T, model.critical().p  # type: ignore[union-attr]
        low = float(model.columns(("T", "quality"), 0.8 * T_c, 0.0).p)
        for title, p in (
            ("isobar", np.full(ROWS, low)),
            ("p rising", np.linspace(low, 0.7 * p_c, ROWS)),
        ):
            edges = [model.columns(("p", "quality"), p, np.full(ROWS, q)) for q in (0.0, 1.0)]
            for reach, share in (("dome", (0.0, 1.0)), ("through dome", (-0.1, 1.1))):
                along = np.linspace(*share, ROWS + 2)[1:-1]
                h = edges[0].h + along * (edges[1].h - edges[0].h)
                made = one_by_one(model, p, h)
                for name in ("h", "s"):
                    y = np.asarray(getattr(made, name))
                    fluid_case(f"{fluid}, {reach}, {title}", fluid, name, p, y, made)
    single_point()


def single_point() -> None:
    """What a single call costs over the bare one."""
    model, state = model_of("nitrogen"), CoolProp.AbstractState("HEOS", "nitrogen")
    known = {"T": 300.0, "p": 60e5}
    made = model.columns(("T", "p"), known["T"], known["p"])
    known |= {"h": float(made.h), "s": float(made.s)}
    for pair in (("T", "p"), ("p", "h"), ("p", "s")):
        name = "T" if pair[0] == "T" else pair[1]
        p, y = np.array([known["p"]]), np.array([known[name]])
        x1, x2 = known[pair[0]], known[pair[1]]
        best = [
            min(seconds(run) for _ in range(7))
            for run in (
                lambda: bare(state, name, p, y),  # noqa: B023  (run at once)
                lambda: model.columns(pair, x1, x2),  # noqa: B023
            )
        ]
        print(f"nitrogen, one point {pair}: bare {best[0]:.1f} us, ours {best[1]:.1f} us")


def seconds(run: Callable[[], Any], times: int = 200) -> float:
    """Microseconds of one call."""
    start = time.perf_counter()
    for _ in range(times):
        run()
    return (time.perf_counter() - start) / times * 1e6


def mixtures() -> None:
    """A gas over a thousand states, the library on a few of them."""
    for title, (parts, T_range, p_range) in MIXTURES.items():
        spec = lw.Fluid(parts, backend="coolprop").spec
        model = CoolPropBackend().open(spec, {})
        T, p = np.linspace(*T_range, MIXTURE_ROWS), np.linspace(*p_range, MIXTURE_ROWS)
        start = time.perf_counter()
        made = model.columns(("T", "p"), T, p)
        print(f"{title}: first column, the phase established, {time.perf_counter() - start:.2f} s")
        state = CoolProp.AbstractState("HEOS", "&".join(model.fluids))  # type: ignore[attr-defined]
        state.set_mole_fractions(list(parts.values()))
        sample = np.linspace(0, MIXTURE_ROWS - 1, SAMPLE).astype(int)
        native = bare(state, "T", p[sample], T[sample])
        for pair, name, column in (
            (("T", "p"), "T", T[sample]),
            (("p", "h"), "h", native[:, 3]),
            (("p", "s"), "s", native[:, 4]),
        ):
            begun = time.perf_counter()
            answers = bare(state, name, p[sample], column)
            raw = (time.perf_counter() - begun) / SAMPLE
            x, y = (np.asarray(getattr(made, each)) for each in pair)
            times = []
            for _ in range(ROUNDS):
                begun = time.perf_counter()
                again = model.columns(pair, x, y)
                times.append((time.perf_counter() - begun) / MIXTURE_ROWS)
            mine = statistics.median(times)
            off = float(np.nanmax(np.abs(again.T - T)))
            print(
                f"{title:22} {pair}  {raw * 1e3:8.1f} {mine * 1e3:6.3f} ms  {raw / mine:7.0f} x  "
                f"noise {(max(times) - min(times)) / 2 / mine:.0%}  T {off:.0e} K, failed "
                f"{len(again.failed)} of {MIXTURE_ROWS}; library "
                f"{int(np.isnan(answers[:, 0]).sum())} of {SAMPLE}"
            )


if __name__ == "__main__":
    asked = sys.argv[1:] or ["fluids", "mixtures"]
    for part in asked:
        {"fluids": fluids, "mixtures": mixtures}[part]()
