"""Which phases a mixture has at T and p: a stability test, then a two-phase flash.

CoolProp's own flash costs 8 to 90 ms a state, takes wrong density roots and misses phases; here
both steps stand on the density and the fugacities of single phases, whose roots are checked.

Sources: M. L. Michelsen, Fluid Phase Equilib. 9 (1982) 1-19 (stability) and 21-40 (flash);
H. H. Rachford, J. D. Rice, J. Pet. Technol. 4 (1952) 10 (material balance).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from lostwork_plugins.coolprop.bracketing import root_between
from lostwork_plugins.coolprop.phase import GAS, LIQUID, Phase, PhaseEquation

__all__ = ["Equilibrium", "NoEquilibrium", "TwoPhases", "equilibrium", "likeliest_phase", "splits"]

_TRIAL_STEPS = 60
_TRIAL_CLOSE = 1e-8
_TRIVIAL = 1e-3
_UNSTABLE = 1e-9
_UNSTABLE_ON_LINE = 1e-6
_FLASH_STEPS = 400
_FLASH_CLOSE = 3e-13
_FLASH_GOOD = 1e-10
_ACCELERATE_EVERY = 5
_LIQUID_LIKE = 1.9
_LONGEST_LEAP = 2.0
_EDGE = 1e-7
_INSET = 1e-10
# Above every critical temperature by this much there is no liquid to look for.
_SUPERCRITICAL = 1.1


class NoEquilibrium(Exception):
    """The phases at T and p could not be told."""


@dataclass(frozen=True, slots=True)
class TwoPhases:
    """Liquid and vapour in equilibrium; vapour fraction by amount."""

    vapour_fraction: float
    liquid: Phase
    vapour: Phase

    @property
    def ln_K(self) -> list[float]:
        """Logarithms of the vapour-liquid ratios."""
        pairs = zip(self.liquid.ln_phi, self.vapour.ln_phi, strict=True)
        return [low - high for low, high in pairs]


Equilibrium = Phase | TwoPhases


def equilibrium(
    equation: PhaseEquation,
    T: float,
    p: float,
    z: Sequence[float],
    ln_K: Sequence[float] | None = None,
) -> Equilibrium:
    """Phase, or two phases, of composition z at T (K) and p (Pa).

    `ln_K` are ratios known from a state near by.

    Raises
    ------
    NoEquilibrium
        No density root stands the check, the flash does not converge, or there are two liquids.
    """
    if ln_K is not None:
        try:
            phases = _flash(equation, T, p, z, ln_K)
        except NoEquilibrium:
            pass  # the neighbour was too far; ask the stability test
        else:
            if 0.0 <= phases.vapour_fraction <= 1.0:
                return phases
    try:
        feed = likeliest_phase(equation, T, p, z)
    except NoEquilibrium:
        # Deep inside the dome the feed as one phase may not exist at all; then it has to split.
        return _flash(equation, T, p, z, equation.cubic.wilson(T, p))
    if _SUPERCRITICAL * max(equation.critical_temperatures) < T:
        return feed
    started = _unstable_towards(equation, T, p, z, feed)
    if started is None:
        return feed
    phases = _flash(equation, T, p, z, started)
    # A feed on the edge of the dome to within round-off is the single phase that it is.
    return phases if 0.0 <= phases.vapour_fraction <= 1.0 else feed


def splits(equation: PhaseEquation, T: float, p: float, z: Sequence[float]) -> bool:
    """Whether a feed on a saturation line found otherwise would split off yet another phase."""
    feed = likeliest_phase(equation, T, p, z)
    return _unstable_towards(equation, T, p, z, feed, margin=_UNSTABLE_ON_LINE) is not None


def likeliest_phase(equation: PhaseEquation, T: float, p: float, z: Sequence[float]) -> Phase:
    """Single phase of the lesser Gibbs energy, whether or not it would split."""
    found = [equation.phase(T, p, z, kind) for kind in (GAS, LIQUID)]
    phases = [phase for phase in found if phase is not None]
    if not phases:
        raise NoEquilibrium("no density root of the equation is near that of a cubic equation")
    return min(phases, key=lambda phase: sum(map(float.__mul__, phase.ln_phi, phase.x)))


def _unstable_towards(
    equation: PhaseEquation,
    T: float,
    p: float,
    z: Sequence[float],
    feed: Phase,
    margin: float = _UNSTABLE,
) -> list[float] | None:
    """Ratios to start a flash from, or ``None`` where no trial phase lowers the Gibbs energy."""
    target = [math.log(x) + phi for x, phi in zip(z, feed.ln_phi, strict=True)]
    wilson = equation.cubic.wilson(T, p)
    best: tuple[float, list[float]] | None = None
    for kind, sign in ((GAS, 1.0), (LIQUID, -1.0)):
        trial = _trial_phase(equation, T, p, z, target, kind, [sign * k for k in wilson])
        if trial is None:
            continue
        total, ln_ratio = trial
        if total > 1 + margin and (best is None or total > best[0]):
            best = total, [sign * k for k in ln_ratio]
    return best[1] if best else None


def _trial_phase(
    equation: PhaseEquation,
    T: float,
    p: float,
    z: Sequence[float],
    target: Sequence[float],
    kind: str,
    ln_ratio: Sequence[float],
) -> tuple[float, list[float]] | None:
    """Stationary trial phase: sum of its amounts and their logarithms over the feed's."""
    ln_z = [math.log(x) for x in z]
    ln_Y = [a + k for a, k in zip(ln_z, ln_ratio, strict=True)]
    rho: float | None = None
    change: list[float] = []
    for step in range(1, _TRIAL_STEPS + 1):
        top = max(ln_Y)
        amounts = [math.exp(y - top) for y in ln_Y]
        total = sum(amounts)
        phase = _phase_of_either_kind(
            equation, T, p, [amount / total for amount in amounts], kind, rho
        )
        if phase is None:
            return None
        rho = phase.rho
        last, new = change, [t - phi for t, phi in zip(target, phase.ln_phi, strict=True)]
        change = [b - a for a, b in zip(ln_Y, new, strict=True)]
        ln_Y = new
        size = max(map(abs, change))
        apart = sum((y - a) ** 2 for y, a in zip(ln_Y, ln_z, strict=True))
        if apart < _TRIVIAL and size < 0.1:
            return None
        if size < _TRIAL_CLOSE:
            break
        if step % _ACCELERATE_EVERY == 0:
            ln_Y = _accelerated(ln_Y, change, last)
    total = sum(map(math.exp, ln_Y))
    # Normalised, so that some ratios are above one and some below.
    ln_total = math.log(total)
    return total, [y - ln_total - a for y, a in zip(ln_Y, ln_z, strict=True)]


def _phase_of_either_kind(
    equation: PhaseEquation, T: float, p: float, x: Sequence[float], kind: str, rho: float | None
) -> Phase | None:
    phase = equation.phase(T, p, x, kind, rho)
    return phase or equation.phase(T, p, x, LIQUID if kind == GAS else GAS, rho)


def _flash(
    equation: PhaseEquation, T: float, p: float, z: Sequence[float], ln_K: Sequence[float]
) -> TwoPhases:
    """Successive substitution, accelerated by the dominant eigenvalue."""
    ln_K = list(ln_K)
    rho_liquid = rho_vapour = None
    change: list[float] = []
    size = math.inf
    liquid = vapour = None
    beta = 0.5
    for step in range(1, _FLASH_STEPS + 1):
        beta, x, y = _material_balance(z, ln_K)
        liquid = _phase_of_either_kind(equation, T, p, x, LIQUID, rho_liquid)
        vapour = _phase_of_either_kind(equation, T, p, y, GAS, rho_vapour)
        if liquid is None or vapour is None:
            raise NoEquilibrium("a phase of the flash has no density root near a cubic equation's")
        rho_liquid, rho_vapour = liquid.rho, vapour.rho
        last = change
        new = [a - b for a, b in zip(liquid.ln_phi, vapour.ln_phi, strict=True)]
        change = [b - a for a, b in zip(ln_K, new, strict=True)]
        ln_K = new
        previous, size = size, max(map(abs, change))
        if size < _FLASH_CLOSE or (size < _FLASH_GOOD and size >= previous):
            break
        if max(map(abs, ln_K)) < _TRIVIAL:
            raise NoEquilibrium("liquid and vapour become one: too close to a critical point")
        if step % _ACCELERATE_EVERY == 0:
            ln_K = _accelerated(ln_K, change, last)
    if size > _FLASH_GOOD or liquid is None or vapour is None:
        raise NoEquilibrium("the two-phase flash did not converge")
    if not -_EDGE <= beta <= 1.0 + _EDGE:
        raise NoEquilibrium("the two-phase flash left the dome")
    covolume = equation.cubic.covolume
    if (
        vapour.rho * covolume(vapour.x) * _LIQUID_LIKE > 1.0
        and liquid.rho * covolume(liquid.x) * _LIQUID_LIKE > 1.0
    ):
        raise NoEquilibrium("the equation splits it into two liquids, which are not modelled")
    return TwoPhases(beta, liquid, vapour)


def _material_balance(
    z: Sequence[float], ln_K: Sequence[float]
) -> tuple[float, list[float], list[float]]:
    """Vapour fraction and normalised compositions for given ratios (may lie outside 0 to 1)."""
    K = [math.exp(k) for k in ln_K]
    lowest, highest = min(K), max(K)
    if not (math.isfinite(lowest) and math.isfinite(highest)):
        raise NoEquilibrium("the two-phase flash did not converge")
    if lowest >= 1.0 or highest <= 1.0:
        raise NoEquilibrium("the two-phase flash left the dome")
    low, high = 1 / (1 - highest), 1 / (1 - lowest)

    def imbalance(beta: float) -> float:
        return sum(x * (k - 1) / (1 + beta * (k - 1)) for x, k in zip(z, K, strict=True))

    a, b = low * (1 - _INSET), high * (1 - _INSET)
    beta = root_between(imbalance, a, imbalance(a), b, imbalance(b), x_tolerance=1e-16)
    x = [zi / (1 + beta * (k - 1)) for zi, k in zip(z, K, strict=True)]
    y = [k * xi for k, xi in zip(K, x, strict=True)]
    total_x, total_y = sum(x), sum(y)
    return beta, [xi / total_x for xi in x], [yi / total_y for yi in y]


def _accelerated(
    values: list[float], change: Sequence[float], last: Sequence[float]
) -> list[float]:
    """Take the rest of a geometric series of changes at once."""
    if not last:
        return values
    along = sum(a * b for a, b in zip(change, last, strict=True))
    before = sum(b * b for b in last)
    ratio = along / before if before else 0.0
    if not 0.0 < ratio < 0.97:
        return values
    ahead = ratio / (1 - ratio)
    ahead = min(ahead, _LONGEST_LEAP / max(map(abs, change)))
    return [v + c * ahead for v, c in zip(values, change, strict=True)]
