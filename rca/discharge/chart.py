"""What the figures show: core temperature over radius and rise time, and one bubble's history."""

import numpy as np
import numpy.typing as npt

from rca.discharge.critical import critical_radius
from rca.discharge.delay import delays
from rca.discharge.inputs import Inputs
from rca.discharge.model import Map, Trace
from rca.discharge.sampling import HOLD
from rca.physics.bubble import BubbleHistory, bubble_batch, bubble_history
from rca.physics.collapse import rayleigh_collapse_time

Floats = npt.NDArray[np.float64]

RADII = (0.02e-3, 5e-3)  # [m]
RISES = (0.03e-3, 30e-3)  # [s]
TRACE_ROWS = 240
NODES = 101  # of the driving pressure: the history is drawn no coarser; a multiple of the rise


def core_map(inputs: Inputs, *, columns: int = 40, rows: int = 24) -> Map:
    """Peak core temperature over radius and rise time at the middle of all other inputs.

    Quasi-static: inertia is left out, so that the map shows what the line pressure alone does.
    """
    radius = np.geomspace(*RADII, columns)
    rise = np.geomspace(*RISES, rows)
    r, t = (a.ravel() for a in np.meshgrid(radius, rise))
    peaks = bubble_batch(
        r, inputs.temperature.value, inputs.inlet.value, inputs.discharge.value, t, hold=HOLD,
        oil=inputs.oil, inertial=False, delays=delays(),
    )  # fmt: skip
    core = peaks.core.reshape(rows, columns)
    return Map(
        radius=tuple(radius.tolist()),
        rise_time=tuple(rise.tolist()),
        core=tuple(tuple(row) for row in core.tolist()),
        critical=tuple(
            critical_radius(
                rise,
                inlet=inputs.inlet.value,
                temperature=inputs.temperature.value,
                discharge=inputs.discharge.value,
                hold=HOLD,
                oil=inputs.oil,
            ).tolist()
        ),
    )


def trace(inputs: Inputs, radius: float) -> Trace:
    """One bubble through the machine's middle rise and a hold of half as long again.

    Where the rise was measured and counts, its recorded course drives the bubble, stretched to the
    machine's own pressures; the same bubble under an even rise stands beside it.
    """
    rise = inputs.rise.spread.p50
    time, line = _driver(inputs)
    history = _followed(inputs, radius, time, line)
    keep = np.unique(np.linspace(0, history.time.size - 1, TRACE_ROWS).astype(int))
    at = history.time[keep]
    even = None
    if inputs.rise.course:
        p1, p2 = inputs.inlet.value, inputs.discharge.value
        nodes = np.array([0.0, rise, 2.5 * rise])
        even = float(_followed(inputs, radius, nodes, np.array([p1, p2, p2])).peaks.core[0])
    return Trace(
        radius_0=radius,
        rise_time=rise,
        time=tuple(at.tolist()),
        line=tuple(np.interp(at, time, line).tolist()),
        pressure=tuple(history.pressure[keep].tolist()),
        radius=tuple(history.radius[keep].tolist()),
        core=tuple(history.core[keep].tolist()),
        mean=tuple(history.mean[keep].tolist()),
        wall=tuple(history.wall[keep].tolist()),
        above_800=float(history.peaks.above[0][0]),
        linear_core=even,
    )


def _driver(inputs: Inputs) -> tuple[Floats, Floats]:
    """Time [s] and line pressure [Pa abs] that drive the bubble, hold included."""
    p1, p2 = inputs.inlet.value, inputs.discharge.value
    if not inputs.rise.course:
        rise = inputs.rise.spread.p50
        time = np.linspace(0.0, 2.5 * rise, NODES)
        return time, np.interp(time, [0.0, rise], [p1, p2])
    course = np.array(inputs.rise.course)
    # ringing below the foot or above the crest stays in, but never under half the inlet pressure
    line = np.maximum(p1 + (p2 - p1) * course[:, 1], 0.5 * p1)
    end = course[-1, 0]
    hold = np.linspace(end, 2.5 * end, NODES // 2)[1:]
    return np.append(course[:, 0], hold), np.append(line, np.full(hold.size, line[-1]))


def _followed(inputs: Inputs, radius: float, time: Floats, line: Floats) -> BubbleHistory:
    collapse = float(rayleigh_collapse_time(radius, line[0], inputs.oil.density))
    steepest = (line[-1] - line[0]) / float(np.max(np.diff(line) / np.diff(time)))
    return bubble_history(
        radius, inputs.temperature.value, time, line, oil=inputs.oil,
        inertial=steepest < 20.0 * collapse, delays=delays(),
    )  # fmt: skip
