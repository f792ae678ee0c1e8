"""Resistances of the suction path out of its own record: viscous, quadratic, tank depression.

Model of a running bin, with the losses taken at one reference state (warm, full flow):

    p = still + offset - viscous (nu rho Q)/(nu rho Q)_ref - quadratic Q^2/Q_ref^2
        - depression

and p = still + offset at rest; all four move in time. A loss that follows viscosity is told from
one that does not only where the oil temperature varied, a quadratic loss from a tank depression
only where the speed varied, an offset from a depression only where the pump was also seen at rest.
"""

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.bounded_draws import bounded_mixture, bounded_mixtures
from rca.suction.breathing import Breathing, breathing
from rca.suction.budget import fluid_viscosities, oil_density, pump_flow
from rca.suction.clean_line import CleanLine, Excitation, clean_line
from rca.suction.priors import NOTICED, priors_of, told_by_breathing
from rca.suction.rows import Rows, SetAside, suction_rows
from rca.suction.spread import Spread, spread
from rca.suction.state import usable_temperature
from rca.suction.thermal_lag import thermometer_lag, with_lag
from rca.suction.varying_fit import Prior, VaryingFit, fit_varying

FloatArray = npt.NDArray[np.float64]
LEAST_ROWS = 60
MOST_KNOTS = 13
ROWS_A_KNOT = 40
DRAWS = 2000
TRACK_DRAWS = 1000
PRIOR_DRAWS = 4000
USEFUL = 0.03e5  # [Pa], an interval narrower than +/- this is of use whatever its relative width
NARROWED = 0.5  # the record has told something where posterior over prior width is below this
CONTRADICTION = 3.0  # standard deviations by which a loss would have to be negative
NAMES = ("viscous", "quadratic", "depression", "offset")


@dataclass(frozen=True, slots=True, kw_only=True)
class Track:
    """One unknown over the record: 5, 50 and 95 % points at the knots [Pa] at the reference."""

    name: str
    p05: tuple[float, ...]
    p50: tuple[float, ...]
    p95: tuple[float, ...]
    narrowing: tuple[float, ...]  # posterior over prior width at each knot; 1: nothing learnt
    identified: tuple[bool, ...]

    @property
    def identified_at_end(self) -> bool:
        """Whether the record tells this unknown at its end."""
        return self.identified[-1]


@dataclass(frozen=True, slots=True, kw_only=True)
class Inverse:
    """Resistances and offsets over the record, with 90 % credible intervals."""

    knots_s: tuple[float, ...]
    reference_flow: float  # [m3/s]
    reference_temperature: float  # [K]
    reference_viscosity: float  # [m2/s]
    reference_density: float  # [kg/m3]
    viscous: Track
    quadratic: Track
    depression: Track
    offset: Track
    total: Track  # viscous + quadratic + depression - offset: the drop itself
    viscous_resistance: Spread  # a in dp = a nu rho Q at the end [1/m3]
    quadratic_resistance: Spread  # b in dp = b rho Q^2 at the end [1/m4]
    noise: float  # [Pa], one bin
    inflation: float  # bins that carry the information of one independent bin
    rows: int
    rest_rows: int
    set_aside: SetAside
    excitation: Excitation
    correlation: tuple[tuple[str, str, float], ...]  # of the draws at the end, pairs beyond 0.8
    clean: CleanLine | None  # the line as described; part of what was believed before
    # P(above the clean line, or above its first value, by more than NOTICED) before the record was
    # seen, of viscous, quadratic, depression; and of an offset that lowers the reading
    raised_before: tuple[float, float, float, float]
    level_known: bool
    level_stated: bool
    headspace_known: bool
    headspace_drop: float | None  # [Pa], recorded air minus head space, end of the record
    thermometer_lag: float  # [s], by which the temperature is taken later; 0: none found
    breathing: Breathing | None  # None where no swing of the level is on record
    contradicted: tuple[str, ...]  # unknowns the record asks to be negative
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class InverseDraws:
    """Draws behind an ``Inverse``; arrays, not stored.

    ``first`` and ``last`` are (n, 4) in the order of ``NAMES``, with losses and depression at
    least zero at both ends.
    """

    first: FloatArray
    last: FloatArray
    rows: Rows


def estimate_resistances(
    case: Case, aligned: AlignedRecord, *, seed: int
) -> tuple[Inverse, InverseDraws] | str:
    """Resistances over the record, or in words why there are none.

    Errs: a pump set back draws less than speed times displacement, so a resistance comes out too
    small; a loss between viscous and quadratic (transitional flow) is shared between the two.
    """
    rows = suction_rows(case, aligned)
    if isinstance(rows, str):
        return f"missing: {rows}"
    if int(rows.running.sum()) < LEAST_ROWS:
        return f"fewer than {LEAST_ROWS} usable bins with the pump running"
    flow, temperature = reference_state(case, rows)
    viscosities = fluid_viscosities(case)
    assert viscosities is not None  # rows exist
    nu, rho = float(kinematic_viscosity(temperature, *viscosities)), oil_density(case, temperature)
    lag = thermometer_lag(case, aligned, lambda r: regressors(r, flow, nu, rho))
    moved = suction_rows(case, with_lag(aligned, lag)) if lag else rows
    rows = rows if isinstance(moved, str) else moved
    x = regressors(rows, flow, nu, rho)
    y = rows.pressure - rows.still
    knots = _knots(rows)
    excitation = _excitation(rows, x)
    clean = clean_line(case, flow, temperature, excitation)
    breath = breathing(case, rows, x)
    plain = priors_of(clean, level_stated=rows.level_stated)
    priors = told_by_breathing(plain, breath.verdict if breath is not None else "not told")
    fit = fit_varying(rows.time, y, x, knots, priors)
    rng = np.random.default_rng(seed)
    first, last, contradicted = _ends(fit, rng)
    prior = _prior_draws(priors, knots.size, rng)
    tracks = _tracks(fit, prior, rng)
    aside = replace(rows.set_aside, outliers=int((~fit.kept).sum()))
    inverse = Inverse(
        knots_s=tuple(float(k) for k in knots),
        reference_flow=flow,
        reference_temperature=temperature,
        reference_viscosity=nu,
        reference_density=rho,
        viscous=tracks["viscous"],
        quadratic=tracks["quadratic"],
        depression=tracks["depression"],
        offset=tracks["offset"],
        total=tracks["total"],
        viscous_resistance=spread(last[:, 0] / (nu * rho * flow)),
        quadratic_resistance=spread(last[:, 1] / (rho * flow**2)),
        noise=fit.noise,
        inflation=fit.inflation,
        rows=int(rows.running.sum()),
        rest_rows=int((~rows.running).sum()),
        set_aside=aside,
        excitation=excitation,
        correlation=_correlation(last),
        clean=clean,
        raised_before=_raised_before(_prior_draws(plain, knots.size, rng), clean),
        level_known=rows.level_known,
        level_stated=rows.level_stated,
        headspace_known=rows.headspace_known,
        headspace_drop=rows.headspace_drop,
        thermometer_lag=lag,
        breathing=breath,
        contradicted=contradicted,
        remarks=_remarks(rows, aside, lag),
    )
    return inverse, InverseDraws(first=first, last=last, rows=rows)


def reference_state(case: Case, rows: Rows) -> tuple[float, float]:
    """Flow [m3/s] and temperature [K] the losses are stated at: the case's, else the median."""
    nominal = pump_flow(case)
    flow = float(nominal) if nominal is not None and float(nominal) > 0 else None
    temperature = case.fluid.temperature
    return (
        flow if flow is not None else float(np.median(rows.flow[rows.running])),
        temperature.value
        if temperature is not None and usable_temperature(temperature)
        else float(np.median(rows.temperature[rows.running])),
    )


def regressors(rows: Rows, flow: float, nu: float, rho: float) -> FloatArray:
    """Columns of viscous, quadratic, depression and offset for each row, one at the reference.

    The quadratic loss is taken at the reference density. The two per cent that density moves over
    30 K would else tell a quadratic loss from a depression at a single flow, by less than any
    model of the line is good for.
    """
    run = rows.running.astype(float)
    viscous = rows.nu * rows.rho * rows.flow / (nu * rho * flow)
    quadratic = rows.flow**2 / flow**2
    return np.column_stack([-viscous * run, -quadratic * run, -run, np.ones_like(run)])


def _knots(rows: Rows) -> FloatArray:
    """Knots evenly in time over the running bins, no more than the bins can carry."""
    time = rows.time[rows.running]
    number = int(np.clip(time.size // ROWS_A_KNOT, 1, MOST_KNOTS))
    if number == 1:
        return np.array([0.5 * (time[0] + time[-1])])
    return np.linspace(time[0], time[-1], number)


def _ends(
    fit: VaryingFit, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray, tuple[str, ...]]:
    """Draws at the first and the last knot, losses and depression not negative at both.

    Where the record asks for a negative one, beyond three standard deviations and NOTICED, it is
    named.
    """
    p, last = len(NAMES), fit.knots.size - 1
    places = np.r_[0:p, last * p : (last + 1) * p] if last else np.arange(p)
    bounded = places % p != NAMES.index("offset")
    draws, distance = bounded_mixture(
        fit.weights,
        fit.means[:, places],
        fit.covariances[:, places[:, None], places],
        bounded,
        DRAWS,
        rng,
    )
    asked = (fit.weights @ fit.means[:, places]).reshape(-1, p).min(axis=0)
    named = tuple(n for n, v in zip(NAMES, asked, strict=True) if v < -NOTICED and n != "offset")
    contradicted = named if distance > CONTRADICTION else ()
    return draws[:, :p], draws[:, -p:], contradicted


def _prior_draws(priors: tuple[Prior, ...], knots: int, rng: np.random.Generator) -> FloatArray:
    """Draws of what was believed before at the knots, (n, K, 4); no sign forced."""
    out = np.empty((PRIOR_DRAWS, knots, len(priors)))
    for j, courses in enumerate(priors):
        pick = rng.choice(len(courses), PRIOR_DRAWS, p=[c.weight for c in courses])
        mean, sd, walk = (
            np.array([getattr(c, name) for c in courses])[pick, None]
            for name in ("mean", "sd", "walk")
        )
        first = mean + sd * rng.standard_normal((PRIOR_DRAWS, 1))
        steps = rng.standard_normal((PRIOR_DRAWS, knots - 1)) * walk / np.sqrt(max(knots - 1, 1))
        out[:, :, j] = np.cumsum(np.hstack([first, steps]), axis=1)
    return out


def _raised_before(
    prior: FloatArray, clean: CleanLine | None
) -> tuple[float, float, float, float]:
    good = (prior[:, [0, -1], :3] >= 0.0).all(axis=(1, 2))
    first, last = prior[good, 0], prior[good, -1]
    base = first[:, :3]
    if clean is not None:
        base = np.array([[clean.viscous, clean.quadratic, clean.depression]])
    over = np.mean(last[:, :3] - base > NOTICED, axis=0)
    off = np.mean(-last[:, 3] > NOTICED)
    return float(over[0]), float(over[1]), float(over[2]), float(off)


def _tracks(fit: VaryingFit, prior: FloatArray, rng: np.random.Generator) -> dict[str, Track]:
    """Every unknown and their sum at every knot, bounds applied at that knot."""
    p, knots = len(NAMES), fit.knots.size
    sums = np.array([1.0, 1.0, 1.0, -1.0])
    rows: dict[str, list[tuple[float, ...]]] = {name: [] for name in (*NAMES, "total")}
    bounded = np.array([name != "offset" for name in NAMES])
    places = np.arange(knots)[:, None] * p + np.arange(p)
    draws, _ = bounded_mixtures(
        fit.weights,
        fit.means[:, places].transpose(1, 0, 2),
        fit.covariances[:, places[:, :, None], places[:, None, :]].transpose(1, 0, 2, 3),
        bounded,
        TRACK_DRAWS,
        rng,
    )
    for k in range(knots):
        after = draws[k]
        before = prior[:, k][(prior[:, k, :3] >= 0.0).all(axis=1)]
        for name, a, b in zip(
            (*NAMES, "total"),
            np.column_stack([after, after @ sums]).T,
            np.column_stack([before, before @ sums]).T,
            strict=True,
        ):
            low, mid, high = (float(v) for v in np.quantile(a, [0.05, 0.5, 0.95]))
            width = float(np.subtract(*np.quantile(b, [0.95, 0.05])))
            rows[name].append((low, mid, high, (high - low) / max(width, USEFUL)))
    return {name: _track(name, values) for name, values in rows.items()}


def _track(name: str, values: list[tuple[float, ...]]) -> Track:
    low, mid, high, narrowing = zip(*values, strict=True)
    return Track(
        name=name,
        p05=low,
        p50=mid,
        p95=high,
        narrowing=narrowing,
        identified=tuple(
            ratio < NARROWED and 0.5 * (c - a) < max(USEFUL, 0.3 * abs(b))
            for a, b, c, ratio in values
        ),
    )


def _excitation(rows: Rows, x: FloatArray) -> Excitation:
    run = rows.running
    cold, hot = np.quantile(rows.temperature[run], [0.01, 0.99])
    nu = np.quantile(rows.nu[run], [0.01, 0.99])
    flow = np.quantile(rows.flow[run], [0.01, 0.99])
    columns = x[run][:, :3]
    scaled = columns / np.linalg.norm(columns, axis=0)
    singular = np.linalg.svd(scaled.T @ scaled, compute_uv=False)
    return Excitation(
        temperature_low=float(cold),
        temperature_high=float(hot),
        viscosity_ratio=float(nu[1] / nu[0]),
        flow_ratio=float(flow[1] / flow[0]),
        rest_rows=int((~run).sum()),
        condition=float(np.sqrt(singular[0] / max(singular[-1], 1e-18 * singular[0]))),
    )


def _correlation(last: FloatArray) -> tuple[tuple[str, str, float], ...]:
    between = np.atleast_2d(np.corrcoef(last.T))
    return tuple(
        (NAMES[i], NAMES[j], float(between[i, j]))
        for i in range(len(NAMES))
        for j in range(i + 1, len(NAMES))
        if abs(between[i, j]) > 0.8
    )


def _remarks(rows: Rows, aside: SetAside, lag: float) -> tuple[str, ...]:
    said = []
    turning = int(rows.running.sum()) + aside.starved
    if aside.starved:
        said.append(
            f"{aside.starved} of {turning} running bins lie below 0.25 bar(a), where the flow is "
            "no longer the displacement; they are left out, so the highest losses are too."
        )
    if lag:
        said.append(
            f"The losses fit best with the oil temperature taken {abs(lag) / 60:.0f} min "
            f"{'later' if lag > 0 else 'earlier'}, and it is: the thermometer runs that far "
            f"{'behind' if lag > 0 else 'ahead of'} the oil in the line, or the viscosity changes "
            "with temperature otherwise than stated."
        )
    if aside.reversed:
        said.append(f"{aside.reversed} bins with the shaft or the flow reversed are left out.")
    if aside.temperature:
        said.append(
            f"{aside.temperature} bins with an oil temperature outside \u221270 to 300 \u00b0C "
            "are left out."
        )
    if not (~rows.running).any():
        said.append("The pump is never seen at rest with this transducer.")
    return tuple(said)
