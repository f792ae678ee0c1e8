"""Ignition delay of a heavy-alkane vapour in air, as tabulated from detailed kinetics.

The table ``ignition_delay.json`` is made by ``rca.workshop.ignition_table`` and names its
mechanism, the library and the mechanism file's hash.
"""

import json
from dataclasses import dataclass
from functools import cache
from importlib import resources
from typing import Any

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.physics.delay_grid import DelayGrid, delay_grid

Floats = npt.NDArray[np.float64]

T_RANGE = (600.0, 1500.0)  # [K]
P_RANGE = (10e5, 450e5)  # [Pa]
PHI_RANGE = (0.5, 2.0)
OXYGEN_RANGE = (0.2095, 0.35)  # of the air, by volume [-]
# Shock-tube and rapid-compression data of C7-C14 alkanes end near 60 bar: Shen et al., Energy
# Fuels 23 (2009) 2482 (9-58 atm); Pfahl et al. 1996 (13-50 bar); from memory.
PUBLISHED_TO = 60e5  # [Pa]
TABLE = "ignition_delay.json"


@dataclass(frozen=True, slots=True, kw_only=True)
class DelayTable:
    """The shipped delays with their axes and provenance."""

    log_delay: Floats  # ln(s): oxygen x phi x temperature x pressure
    oxygen: Floats
    phi: Floats
    temperature: Floats  # [K]
    pressure: Floats  # [Pa]
    mechanism: str
    mechanism_sha256: str
    library: str


@cache
def delay_table() -> DelayTable:
    """The shipped table, read once."""
    text = resources.files("rca.discharge").joinpath(TABLE).read_text(encoding="utf-8")
    raw: dict[str, Any] = json.loads(text)
    return DelayTable(
        log_delay=np.log(np.array(raw["delay_s"], dtype=float)),
        oxygen=np.array(raw["oxygen"]),
        phi=np.array(raw["phi"]),
        temperature=np.array(raw["temperature_k"]),
        pressure=np.array(raw["pressure_bar"]) * 1e5,
        mechanism=f"{raw['mechanism']} ({raw['mechanism_source']})",
        mechanism_sha256=raw["mechanism_sha256"],
        library=raw["library"],
    )


def ignition_delay(
    temperature: npt.ArrayLike,
    pressure: npt.ArrayLike,
    *,
    phi: npt.ArrayLike = 1.0,
    oxygen: npt.ArrayLike = OXYGEN_RANGE[0],
) -> Floats:
    """Delay of n-dodecane vapour in air at constant pressure [s]; inputs broadcast.

    ``temperature`` 600-1500 K, ``pressure`` 10-450 bar absolute [Pa], equivalence ratio ``phi``
    0.5-2, ``oxygen`` share of the air 0.2095-0.35 (air out of solution in fresh oil has about a
    third). Heavy n-alkanes ignite alike within 20-30 %; branched and ring molecules are slower.
    Above about 60 bar the mechanism is used beyond published experiments; kinetics good to 50 %.
    Evaporation and mixing are left out, so the true delay is longer.
    Source: Wang, Ra, Jia, Reitz, Fuel 136 (2014) 25-36, computed with Cantera; linear in ln(tau)
    over 1/T, ln p, ln phi and ln(oxygen). Raises OutOfRangeError outside the range or for NaN.
    """
    t, p, f, o = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (temperature, pressure, phi, oxygen))
    )
    for name, value, (low, high) in (
        ("temperature [K]", t, T_RANGE), ("pressure [Pa abs]", p, P_RANGE),
        ("phi", f, PHI_RANGE), ("oxygen share", o, OXYGEN_RANGE),
    ):  # fmt: skip
        if not np.all((value >= low * (1 - 1e-9)) & (value <= high * (1 + 1e-9))):
            raise OutOfRangeError(
                f"ignition_delay is tabulated for {name} {low:g} to {high:g} (kinetics of Wang et "
                f"al. 2014); got {value!r}"
            )
    table = delay_table()
    places = [
        _place(np.log(table.oxygen), np.log(o)), _place(np.log(table.phi), np.log(f)),
        _place(-1.0 / table.temperature, -1.0 / t), _place(np.log(table.pressure), np.log(p)),
    ]  # fmt: skip
    total = np.zeros(t.shape)
    for corner in np.ndindex(2, 2, 2, 2):
        weight = np.ones(t.shape)
        index = []
        for step, (at, share) in zip(corner, places, strict=True):
            weight = weight * (share if step else 1.0 - share)
            index.append(at + step)
        total += weight * table.log_delay[tuple(index)]
    return np.asarray(np.exp(total))


def _place(nodes: Floats, x: Floats) -> tuple[npt.NDArray[np.intp], Floats]:
    """Interval of each value and the share of the way through it, held inside the table."""
    at = np.clip(np.searchsorted(nodes, x, side="right") - 1, 0, nodes.size - 2)
    return at, np.clip((x - nodes[at]) / (nodes[at + 1] - nodes[at]), 0.0, 1.0)


@cache
def delays() -> DelayGrid:
    """``ignition_delay`` of a stoichiometric mixture in free air as the bubble kernels read it."""
    return delay_grid(ignition_delay, t_range=T_RANGE, p_range=P_RANGE)
