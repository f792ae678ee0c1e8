"""Is there fuel where the gas is hot? Vapour from the wall, or liquid thrown into the bubble."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.base.source import Origin, Reading
from rca.case.model import Case
from rca.discharge.inputs import spread
from rca.discharge.model import FuelPath, Status
from rca.physics.compression import UNIVERSAL_GAS_CONSTANT
from rca.physics.fluid_class import class_values
from rca.physics.vapour import (
    LEAN_SHARE,
    class_vapour_pressure,
    stoichiometric_drop_ratio,
    vapour_equivalence,
)
from rca.suction.budget import fluid_class_name

Floats = npt.NDArray[np.float64]

FLASH_SPREAD = 12.0  # [K], standard uncertainty of a class value; common practice, no source
MEASURED_FLASH_SPREAD = 6.0  # [K], reproducibility of open and closed cup methods (from memory)
HOT_OIL = 423.15  # [K]; above about 150 degC local oil itself gives vapour; common practice
LIKELY, UNLIKELY = 0.5, 0.05


def lean_limit_temperature(
    flash_point: npt.ArrayLike,
    pressure: npt.ArrayLike,
    *,
    vaporisation: npt.ArrayLike = 1.0e5,
    enhancement: npt.ArrayLike = 8.0,
) -> Floats:
    """Surface temperature at which vapour over the oil reaches the lean limit [K]; broadcasts.

    At the flash point the vapour is at the lean limit under 1 atm; from there the vapour pressure
    follows Clausius and Clapeyron with ``vaporisation`` [J/mol] (heavy fractions 80e3-110e3) and
    must rise with ``pressure`` [Pa abs], less the ``enhancement`` of vapour pressure in dense gas
    (about 8 at 172 bar by the Poynting factor; 1-30). The lean limit's own fall with pressure and
    temperature is left out, so the temperature errs high by some 10-20 K.
    Source: Clausius-Clapeyron identity. Raises OutOfRangeError unless inputs are positive and
    pressure is at least 1 atm times the enhancement over 50.
    """
    flash, p, heat, gain = (
        np.asarray(x, dtype=float) for x in (flash_point, pressure, vaporisation, enhancement)
    )
    if not np.all((flash > 200) & (p > 0) & (heat > 2e4) & (gain >= 1) & np.isfinite(p)):
        raise OutOfRangeError(
            "lean_limit_temperature needs a flash point above 200 K, pressure > 0 Pa abs, heat of "
            f"vaporisation above 20 kJ/mol and enhancement >= 1; got {flash_point=}, {pressure=}"
        )
    inverse = 1 / flash - UNIVERSAL_GAS_CONSTANT / heat * np.log(p / (101325.0 * gain))
    if not np.all(inverse > 1 / 1500.0):
        raise OutOfRangeError(
            "lean_limit_temperature: above 1500 K the vapour-pressure law is void"
        )
    return np.asarray(1 / inverse)


def fuel_path(
    case: Case,
    *,
    flash_point: Reading | None,
    pressure: Floats,
    wall: Floats,
    unit: Floats,
    inlet: tuple[float, float] | None = None,
) -> FuelPath:
    """Judge the paths by which fuel could meet the hot gas.

    ``pressure`` and ``wall`` [Pa abs, K]: discharge pressure and peak wall temperature of each
    sample; ``unit``: two columns of uniform numbers for heat of vaporisation and enhancement;
    ``inlet``: temperature and pressure [K, Pa abs] at the inlet, for the vapour that is there from
    the start.
    Liquid thrown into the gas (break-up, jets, foam films) can't be computed from a case folder:
    it keeps the answer at "not excluded" and never makes it "supported".
    """
    name = fluid_class_name(case)
    values = class_values(name)
    if not values.flammable_vapour:
        return FuelPath(
            status=Status.EXCLUDED, flash_point=None, lean_limit=None, margin=None, vapour=0.0,
            reasons=(
                "A water-based fluid: steam and water hold the mixture outside its limits until "
                "the water is lost.",
            ),
        )  # fmt: skip
    flash = flash_point or case.fluid.flash_point
    if flash is None:
        flash = Reading(value=values.flash_point, unit="K", u=FLASH_SPREAD, origin=Origin.DEFAULT)
    heat = 8.0e4 + 3.0e4 * unit[:, 0]
    gain = np.exp(np.log(30.0) * unit[:, 1])
    limit = lean_limit_temperature(flash.value, pressure, vaporisation=heat, enhancement=gain)
    margin = limit - wall
    u = flash.u if flash.u is not None else MEASURED_FLASH_SPREAD
    vapour = _share_below_zero(margin, u)
    measured = None if flash.origin is Origin.DEFAULT else flash.value
    phi, drop = _at_the_inlet(name, measured, inlet) if inlet is not None else (None, None)
    return FuelPath(
        status=Status.SUPPORTED if vapour >= LIKELY else Status.NOT_EXCLUDED,
        flash_point=flash,
        lean_limit=spread(limit),
        margin=spread(margin),
        vapour=vapour,
        reasons=(*_lean_words(phi, drop), *_reasons(vapour, case)),
        inlet_phi=phi,
        drop=drop,
    )


def _at_the_inlet(
    name: str, flash_point: float | None, inlet: tuple[float, float]
) -> tuple[tuple[float, float, float], float]:
    """Equivalence ratio of the saturated vapour, and the drop that would be fuel enough."""
    temperature, pressure = inlet
    low, middle, high = (
        float(vapour_equivalence(p, pressure))
        for p in class_vapour_pressure(name, temperature, flash_point=flash_point)
    )
    return (low, middle, high), float(stoichiometric_drop_ratio(pressure, temperature))


def _lean_words(phi: tuple[float, float, float] | None, drop: float | None) -> tuple[str, ...]:
    if phi is None or drop is None:
        return ()
    if phi[2] >= LEAN_SHARE:
        return ("Vapour saturated at the inlet may already be rich enough to burn.",)
    least, most = (float(f"{LEAN_SHARE / p:.1g}") for p in (phi[2], phi[0]))
    return (
        f"The vapour that is in the bubble from the start is some {least:,.0f} to {most:,.0f} "
        f"times too lean. One oil drop of {drop:.1%} of the bubble's diameter would be fuel "
        "enough.",
    )


def _share_below_zero(margin: Floats, u: float) -> float:
    """P(margin + error < 0) with a logistic stand-in for the normal error of the flash point."""
    return float(np.mean(1.0 / (1.0 + np.exp(1.702 * np.clip(margin / max(u, 1e-9), -40, 40)))))


def _reasons(vapour: float, case: Case) -> tuple[str, ...]:
    words = []
    if vapour < UNLIKELY:
        words.append(
            "Vapour from the bubble's wall stays far below the lean limit: the oil surface is too "
            "cold for it."
        )
    elif vapour < LIKELY:
        words.append("Vapour from the bubble's wall comes near the lean limit.")
    else:
        words.append("Vapour from the bubble's wall reaches the lean limit.")
    hot = case.fluid.temperature
    if hot is not None and hot.value > HOT_OIL:
        words.append("The oil itself is above 150 °C.")
    words.append(
        "Liquid thrown into the gas (break-up of coarse bubbles, foam films, trapped pockets) "
        "would serve as fuel; nothing in a case folder shows or excludes it."
    )
    return tuple(words)
