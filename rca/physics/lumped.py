"""The lumped bubble: one gas temperature, heat through a layer; a cheap estimate of the mean.

Keller-Miksis radius; heat flow 4 pi R^2 k (T0 - T)/l with l = min(sqrt(R alpha/|R'|), R/pi).
Against the resolved model with the same inertia the peak mean temperature lies within 30 K for a
rise 1 -> 172 bar in 1 ms (Peclet 0.1 to 30), hot when small and a little cold when large: an
estimate, no bound. There is no core at all, so it never speaks about ignition. Source: Toegel,
Gompf, Pecha, Lohse, Phys. Rev. Lett. 85 (2000) 3165 (heat flow, from memory).
"""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError, SolverError
from rca.physics.bubble import OilSide, gas_table, parameter_rows, share

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class LumpedPeaks:
    """What lumped histories came to; arrays of one length."""

    mean: Floats  # peak gas temperature [K]
    pressure: Floats  # peak gas pressure [Pa]
    radius_min: Floats  # [m]
    steps: Floats  # [-]


def lumped_batch(
    radius: npt.ArrayLike,
    temperature: npt.ArrayLike,
    p_start: npt.ArrayLike,
    p_end: npt.ArrayLike,
    rise_time: npt.ArrayLike,
    *,
    hold: npt.ArrayLike | None = None,
    oil: OilSide | None = None,
    tolerance: float = 8e-4,
    conduction_factor: npt.ArrayLike = 1.0,
    workers: int = 1,
) -> LumpedPeaks:
    """Peaks of many lumped bubbles under linear rises; inputs broadcast, SI, absolute pressures.

    ``hold`` [s] after the rise, by default a tenth of it. ``workers`` threads, one by default.
    Raises OutOfRangeError for bad input, SolverError (with the state) when a history fails.
    """
    from rca.physics import lumped_kernel  # noqa: PLC0415 - compiled code is loaded on first use

    r, t0, p1, p2, rise, factor = (
        np.array(a, dtype=float)
        for a in np.broadcast_arrays(
            *np.atleast_1d(radius, temperature, p_start, p_end, rise_time, conduction_factor)
        )
    )
    if not np.all((p1 > 0) & (p2 >= p1) & np.isfinite(p2) & (rise > 0)):
        raise OutOfRangeError(
            "lumped_batch needs 0 < p_start <= p_end (absolute Pa) and rise_time > 0; got "
            f"{p_start=}, {p_end=}, {rise_time=}"
        )
    keep = 0.1 * rise if hold is None else np.broadcast_to(np.asarray(hold, dtype=float), r.shape)
    if not np.all(keep > 0):
        raise OutOfRangeError(f"lumped_batch needs hold > 0 s; got {hold=}")
    pars = parameter_rows(
        r, t0, oil or OilSide(), conduction_factor=factor, delay_factor=1.0, stop_below=0.0,
        tolerance=tolerance, ramp_end=rise, stop_at_ignition=False,
    )  # fmt: skip
    ramps = np.ascontiguousarray(np.stack([p1, p2, rise, rise + keep], axis=-1))
    outs = np.zeros((r.size, 6))
    share(
        lambda a, b: lumped_kernel.run_lumped(ramps, pars, gas_table(), outs, a, b),
        r.size,
        workers,
    )
    bad = np.flatnonzero(outs[:, 0] != 0)
    if bad.size:
        i = int(bad[0])
        raise SolverError(
            f"the lumped bubble failed in {bad.size} of {len(outs)} histories; first at t = "
            f"{outs[i, 5]:.4g} s with temperature peak {outs[i, 1]:.4g} K, pressure peak "
            f"{outs[i, 2]:.4g} Pa; radius {r[i]:.4g} m, rise {rise[i]:.4g} s"
        )
    return LumpedPeaks(
        mean=outs[:, 1], pressure=outs[:, 2], radius_min=outs[:, 3], steps=outs[:, 4]
    )
