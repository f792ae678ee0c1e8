"""Rows of the record that say something about the suction line's resistance."""

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.case.site import local_atmosphere
from rca.physics.viscosity import kinematic_viscosity
from rca.records.running import running_bins, standing_bins
from rca.suction.budget import (
    GRAVITY,
    fluid_viscosities,
    oil_densities,
    pump_flow,
)

FloatArray = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]
STARVED = 0.25e5  # [Pa]; below it the pump no longer draws its displacement, so the flow of such
# a row is not known; common practice, no source
UNSTEADY = 0.25  # spread of speed or flow within a bin over its mean
COLD_SHARE = 0.001  # of the running bins
COLDEST, HOTTEST = 203.0, 573.0  # [K], range of the viscosity relation


@dataclass(frozen=True, slots=True, kw_only=True)
class SetAside:
    """Bins of the running pump that were left out of the estimate, by reason."""

    not_recorded: int = 0  # pressure, temperature or flow missing in that bin
    temperature: int = 0  # outside the viscosity relation
    reversed: int = 0  # negative speed or flow
    starved: int = 0  # inlet below STARVED
    unsteady: int = 0  # speed or flow changed within the bin: its means do not belong together
    outliers: int = 0  # beyond five robust standard deviations of the fit


@dataclass(frozen=True, slots=True, kw_only=True)
class Rows:
    """Usable bins in time order; arrays of equal length.

    ``still`` is the pressure a resting, full line would show: air (or the recorded head space)
    and oil head. At rest ``flow`` is zero and ``nu`` one.
    """

    time: FloatArray  # [s]
    pressure: FloatArray  # [Pa]
    still: FloatArray  # [Pa]
    flow: FloatArray  # [m3/s]
    nu: FloatArray  # [m2/s]
    rho: FloatArray  # [kg/m3]
    temperature: FloatArray  # [K]
    running: Mask
    level: FloatArray | None  # [m], recorded; None where it is not
    set_aside: SetAside
    level_known: bool  # a level record moves ``still``
    level_stated: bool  # the level above the inlet is given; else it is taken as zero
    headspace_known: bool
    coldest: float = float("nan")  # [K], 0.1 % of the running bins, starved ones too
    headspace_drop: float | None = None  # [Pa], air minus head space, last twentieth, running

    def take(self, keep: Mask, set_aside: SetAside) -> "Rows":
        """The rows of a mask."""
        names = ("time", "pressure", "still", "flow", "nu", "rho", "temperature", "running")
        return replace(
            self,
            set_aside=set_aside,
            level=self.level[keep] if self.level is not None else None,
            **{name: getattr(self, name)[keep] for name in names},
        )


def suction_rows(case: Case, aligned: AlignedRecord) -> Rows | str:
    """The rows of the running and the resting pump, or what is missing for them.

    Flow is the recorded one, else recorded speed times displacement (full stroke: for a pump set
    back it errs high, and a resistance found with it errs low).
    """
    inlet, temperature = aligned.get("inlet pressure"), aligned.get("oil temperature")
    viscosities = fluid_viscosities(case)
    flow = recorded_flow(case, aligned)
    missing = [
        name
        for absent, name in (
            (inlet is None, "a usable record of the inlet pressure"),
            (temperature is None, "the oil temperature beside it"),
            (flow is None, "the flow, or the shaft speed and the displacement"),
            (viscosities is None, "the viscosity or the grade of the oil"),
        )
        if absent
    ]
    if inlet is None or temperature is None or flow is None or viscosities is None:
        return ", ".join(missing)
    p, t = inlet.mean, temperature.mean
    turning = running_bins(case, aligned)
    known = np.isfinite(p) & np.isfinite(t) & np.isfinite(flow)
    valid = known & (np.nan_to_num(t) > COLDEST) & (np.nan_to_num(t) < HOTTEST)
    backward = _backward(aligned, flow)
    forward = valid & ~backward & (np.nan_to_num(flow) > 0.0)
    fed = forward & (np.nan_to_num(p) >= STARVED)
    steady = _steady(aligned, turning & fed)
    running = turning & fed & steady
    resting = standing_bins(aligned) & valid & ~turning
    keep = running | resting
    still, level_known, headspace_known = _still(case, aligned, t)
    nu, rho = np.ones_like(p), np.full_like(p, np.nan)
    nu[keep] = kinematic_viscosity(t[keep], *viscosities)
    rho[keep] = oil_densities(case, t[keep])
    rows = Rows(
        time=aligned.time_s,
        pressure=p,
        still=still,
        flow=np.where(running, flow, 0.0),
        nu=np.where(running, nu, 1.0),
        rho=rho,
        temperature=t,
        running=running,
        level=_level(aligned),
        set_aside=SetAside(),
        level_known=level_known,
        level_stated=case.reservoir.level_above_inlet is not None,
        headspace_known=headspace_known,
        coldest=float(np.quantile(t[turning & forward], COLD_SHARE))
        if (turning & forward).any()
        else float("nan"),
        headspace_drop=_headspace_drop(case, aligned, running),
    )
    return rows.take(
        keep & np.isfinite(still),
        SetAside(
            not_recorded=int((turning & ~known).sum()),
            temperature=int((turning & known & ~valid).sum()),
            reversed=int((valid & backward).sum()),
            starved=int((turning & forward & ~fed).sum()),
            unsteady=int((turning & fed & ~steady).sum()),
        ),
    )


def recorded_flow(case: Case, aligned: AlignedRecord) -> FloatArray | None:
    """Flow in each bin [m3/s]: recorded, else speed times displacement; None without either."""
    flow, speed = aligned.get("flow"), aligned.get("shaft speed")
    if flow is not None:
        return flow.mean
    return pump_flow(case, speed.mean) if speed is not None else None


def _steady(aligned: AlignedRecord, running: Mask) -> Mask:
    """Bins in which speed and flow hold within UNSTEADY; all, where most bins do not."""
    steady = np.ones(aligned.time_s.shape, dtype=bool)
    for quantity in ("shaft speed", "flow"):
        found = aligned.get(quantity)
        if found is not None:
            spread = np.nan_to_num(found.high - found.low)
            steady &= spread <= UNSTEADY * np.abs(np.nan_to_num(found.mean))
    enough = int((steady & running).sum()) > 0.3 * int(running.sum())
    return steady if enough else np.ones_like(steady)


def _level(aligned: AlignedRecord) -> FloatArray | None:
    """The recorded level with its gaps at the median; None where most of it is a gap."""
    sensor = aligned.get("reservoir level")
    if sensor is None:
        return None
    seen = np.isfinite(sensor.mean)
    if seen.mean() < 0.5:
        return None
    return np.where(seen, sensor.mean, float(np.median(sensor.mean[seen])))


def _headspace_drop(case: Case, aligned: AlignedRecord, running: Mask) -> float | None:
    headspace = aligned.get("headspace pressure")
    if headspace is None:
        return None
    seen = headspace.mean[running & np.isfinite(headspace.mean)]
    if not seen.size:
        return None
    return local_atmosphere(case) - float(np.median(seen[-max(1, seen.size // 20) :]))


def _backward(aligned: AlignedRecord, flow: FloatArray) -> Mask:
    speed = aligned.get("shaft speed")
    least = -0.02 * float(np.nanmax(np.abs(flow), initial=0.0))
    backward = np.nan_to_num(flow) < least
    if speed is not None:
        top = float(np.nanmax(np.abs(speed.mean), initial=0.0))
        backward |= np.nan_to_num(speed.mean) < -0.02 * top
    return np.asarray(backward)


def _still(
    case: Case, aligned: AlignedRecord, temperature: FloatArray
) -> tuple[FloatArray, bool, bool]:
    """Pressure of a resting, full line, and whether level and head space are on record.

    A level sensor's zero is rarely the pump's inlet, so its early median is put at the stated
    level and only its changes are used.
    """
    base = np.full(aligned.time_s.shape, local_atmosphere(case))
    headspace = aligned.get("headspace pressure")
    if headspace is not None and not np.isfinite(headspace.mean).any():
        headspace = None
    if headspace is not None:
        base = headspace.mean.copy()
    stated = case.reservoir.level_above_inlet
    level = np.full(aligned.time_s.shape, stated.value if stated is not None else 0.0)
    sensor = aligned.get("reservoir level")
    if sensor is not None and np.isfinite(sensor.mean).any():
        seen = sensor.mean[np.isfinite(sensor.mean)]
        early = float(np.median(seen[: max(1, seen.size // 20)]))
        level = level + np.where(np.isfinite(sensor.mean), sensor.mean - early, 0.0)
    known = np.where(np.isfinite(temperature), temperature, 313.15)
    rho = oil_densities(case, known)
    return base + rho * GRAVITY * level, sensor is not None, headspace is not None
