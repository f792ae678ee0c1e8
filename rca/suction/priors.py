"""What is believed of the suction path before its record is seen.

Courses of each unknown [Pa] at the reference state: it starts as it should or anywhere, and it
stays or walks. All four may go wrong equally often and equally far, so that nothing but the record
speaks for one of them: how often a strainer clogs and a breather plugs belongs to the verdict.
Losses and depression are at least zero.
"""

from dataclasses import replace

from scipy.stats import multivariate_normal

from rca.suction.clean_line import CleanLine
from rca.suction.varying_fit import Course, Prior

BAR = 1e5
NOTICED = 0.02 * BAR  # a loss smaller than this explains nothing worth mending; judgement
LEAST_U = 0.005 * BAR  # a computed loss is not believed closer than this
LEAST_DEPRESSION_U = 0.003 * BAR
ANYWHERE = 0.25 * BAR  # a first value that is not as described
FREE_WALK = 0.15 * BAR
UNDESCRIBED = 0.3 * BAR  # losses of a line nobody described
TRANSDUCER = 0.02 * BAR  # industrial transducer, with weather and level; common practice
UNKNOWN_LEVEL = 0.06 * BAR  # the same where nobody states the level: some 0.7 m of oil either way
STARTS_WRONG, WALKS = 0.25, 0.25  # how often; judgement


def priors_of(clean: CleanLine | None, *, level_stated: bool = True) -> tuple[Prior, ...]:
    """Courses of viscous loss, quadratic loss, depression and offset, in this order."""
    if clean is None:
        viscous = _courses(0.0, UNDESCRIBED, stays=0.01 * BAR)
        quadratic = _courses(0.0, UNDESCRIBED, stays=0.005 * BAR)
    else:
        viscous = _courses(clean.viscous, max(clean.viscous_u, LEAST_U), stays=0.01 * BAR)
        quadratic = _courses(clean.quadratic, max(clean.quadratic_u, LEAST_U), stays=0.005 * BAR)
    depression = _courses(
        clean.depression if clean is not None else 0.0, LEAST_DEPRESSION_U, stays=0.003 * BAR
    )
    at_rest = TRANSDUCER if level_stated else UNKNOWN_LEVEL
    offset = _courses(0.0, at_rest, stays=0.012 * BAR, signed=False)
    return viscous, quadratic, depression, offset


def told_by_breathing(priors: tuple[Prior, ...], verdict: str) -> tuple[Prior, ...]:
    """The courses once the swing of the level has shown whether the breather lets air in.

    Where it does, a depression that is not as described gets a twentieth of its weight; where it
    does not, twenty times.
    """
    factor = {"free": 0.05, "shut": 20.0}.get(verdict, 1.0)
    viscous, quadratic, depression, offset = priors
    weights = [c.weight * (1.0 if k == 0 else factor) for k, c in enumerate(depression)]
    told = tuple(
        replace(c, weight=w / sum(weights)) for c, w in zip(depression, weights, strict=True)
    )
    return viscous, quadratic, told, offset


def _courses(mean: float, u: float, *, stays: float, signed: bool = True) -> Prior:
    """Starts as described or anywhere, stays or walks."""
    rows = [
        (sd, walk, ws * ww)
        for sd, ws in ((u, 1.0 - STARTS_WRONG), (ANYWHERE, STARTS_WRONG))
        for walk, ww in ((stays, 1.0 - WALKS), (FREE_WALK, WALKS))
    ]
    # The weight holds for values that are not negative at either end; the fit works without that
    # bound, so each weight is raised by what the bound will cost.
    raised = [w / _allowed(mean, sd, walk) if signed else w for sd, walk, w in rows]
    total = sum(raised)
    return tuple(
        Course(mean=mean, sd=sd, walk=walk, weight=w / total)
        for (sd, walk, _), w in zip(rows, raised, strict=True)
    )


def _allowed(mean: float, sd: float, walk: float) -> float:
    """Probability that neither the first nor the last value is negative."""
    between = [[sd**2, sd**2], [sd**2, sd**2 + walk**2]]
    return float(multivariate_normal.cdf([0.0, 0.0], mean=[-mean, -mean], cov=between))
