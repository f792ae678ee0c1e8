"""What burning or merely compressed bubbles do to the oil: heat and soot, per litre and pass."""

import math
from dataclasses import dataclass

from rca.base.errors import OutOfRangeError
from rca.physics.compression import (
    AIR_GAS_CONSTANT,
    AIR_MOLAR_MASS,
    UNIVERSAL_GAS_CONSTANT,
    adiabatic_end_temperature,
    air_internal_energy,
)

# Stoichiometric n-dodecane C12H26 + 18.5 O2: the oxygen of the air sets the heat.
_O2_MOLE_FRACTION = 0.2095
_FUEL_MOLAR_MASS = 170.34e-3  # [kg/mol]
_LOWER_HEATING_VALUE = 44.1e6  # [J/kg], liquid n-dodecane, NIST WebBook (from memory, +/-0.5 %)
FUEL_PER_AIR = _O2_MOLE_FRACTION / 18.5 * _FUEL_MOLAR_MASS / AIR_MOLAR_MASS  # [kg/kg]
HEAT_PER_AIR = FUEL_PER_AIR * _LOWER_HEATING_VALUE  # [J per kg of air]
SOOT_YIELD = (0.05, 0.15)  # kg soot per kg fuel, rich diffusion flames; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class Budget:
    """Heat and soot of one pass, per cubic metre of oil; every bubble counted as burning."""

    air_mass: float  # [kg/m3 of oil]
    compression_heat: float  # [J/m3], adiabatic rise of the air's internal energy
    combustion_heat: float  # [J/m3], oxygen-limited
    compression_rise: float  # [K] of the bulk oil
    combustion_rise: float  # [K] of the bulk oil
    throttling_rise: float  # [K], the same oil let down from the discharge pressure
    soot_low: float  # [kg/m3]
    soot_high: float  # [kg/m3]


def energy_budget(
    *,
    air_fraction: float,
    inlet_pressure: float,
    inlet_temperature: float,
    discharge_pressure: float,
    oil_density: float,
    oil_heat_capacity: float,
    oil_expansion: float,
) -> Budget:
    """Heat and soot of one pass per cubic metre of oil, if every bubble burnt (upper bound).

    ``air_fraction`` free gas volume per volume of oil at the inlet [-]; pressures [Pa abs];
    ``inlet_temperature`` [K]; ``oil_density`` [kg/m3]; ``oil_heat_capacity`` [J/(kg K)];
    ``oil_expansion`` [1/K]. Combustion takes all oxygen to CO2 and H2O: an upper bound on heat.
    Throttling (1 - beta T) dp/(rho cp) of the oil itself dwarfs both: bulk temperature is no
    evidence of burning bubbles. Source: ideal gas; isenthalpic throttling; stoichiometry of
    n-dodecane. Raises OutOfRangeError.
    """
    inputs = (inlet_pressure, inlet_temperature, oil_density, oil_heat_capacity, oil_expansion)
    if not (0 <= air_fraction <= 1 and min(inputs) > 0 and discharge_pressure >= inlet_pressure):
        raise OutOfRangeError(
            "energy_budget needs 0 <= air_fraction <= 1, positive properties and "
            f"discharge_pressure >= inlet_pressure; got {air_fraction=}, {inputs=}, "
            f"{discharge_pressure=}"
        )
    t, p1, p2 = inlet_temperature, inlet_pressure, discharge_pressure
    air = air_fraction * p1 / (AIR_GAS_CONSTANT * t)
    hot = adiabatic_end_temperature(t, p1, p2)
    work = air * float(air_internal_energy(hot) - air_internal_energy(t))
    heat = air * HEAT_PER_AIR
    capacity = oil_density * oil_heat_capacity
    fuel = air * FUEL_PER_AIR
    return Budget(
        air_mass=air,
        compression_heat=work,
        combustion_heat=heat,
        compression_rise=work / capacity,
        combustion_rise=heat / capacity,
        throttling_rise=(1 - oil_expansion * t) * (p2 - p1) / capacity,
        soot_low=SOOT_YIELD[0] * fuel,
        soot_high=SOOT_YIELD[1] * fuel,
    )


def halving_energy(temperature: float, *, step: float = 10.0) -> float:
    """Activation energy at which oxidation life halves for one ``step`` [K] more [J/mol].

    E = R ln 2 T (T + step)/step from ``temperature`` [K]. Exact consequence of Arrhenius; shows
    that the rule "half the life per 10 K" is one energy at one temperature, not a law.
    Raises OutOfRangeError unless temperature > 0 and step > 0.
    """
    if not (temperature > 0 and step > 0):
        raise OutOfRangeError(
            f"halving_energy needs temperature > 0 K and step > 0 K; got {temperature=}, {step=}"
        )
    return UNIVERSAL_GAS_CONSTANT * math.log(2.0) * temperature * (temperature + step) / step


def halving_step(temperature: float, activation_energy: float) -> float:
    """Warming from ``temperature`` [K] that halves oxidation life at an activation energy [K].

    ``activation_energy`` [J/mol]; uninhibited base oils 80e3-130e3 (from memory). The inverse of
    ``halving_energy``. Raises OutOfRangeError unless both are positive, or where no finite warming
    halves the life.
    """
    _refuse_arrhenius("halving_step", temperature, activation_energy)
    reach = UNIVERSAL_GAS_CONSTANT * math.log(2.0) * temperature / activation_energy
    if reach >= 1.0:
        raise OutOfRangeError(
            f"halving_step: at {activation_energy:g} J/mol no warming from {temperature:g} K "
            "halves the life"
        )
    return temperature * reach / (1.0 - reach)


def life_ratio(temperature: float, reference: float, *, activation_energy: float = 100e3) -> float:
    """Oxidation life at ``temperature`` over that at ``reference`` [-]; both [K].

    exp[E/R (1/T - 1/T_ref)]; ``activation_energy`` E [J/mol], 80e3-130e3 for uninhibited base oil
    (from memory). For inhibited oils it applies to the induction time, not to the acid number
    reached; water, metals and air change the life more than ten kelvin do. Source: Arrhenius.
    Raises OutOfRangeError unless all are positive and finite, temperatures 250-500 K.
    """
    _refuse_arrhenius("life_ratio", temperature, activation_energy)
    if not (250.0 <= temperature <= 500.0 and 250.0 <= reference <= 500.0):
        raise OutOfRangeError(
            f"life_ratio is used from 250 K to 500 K; got {temperature=}, {reference=}"
        )
    return math.exp(
        activation_energy / UNIVERSAL_GAS_CONSTANT * (1.0 / temperature - 1.0 / reference)
    )


def _refuse_arrhenius(name: str, temperature: float, energy: float) -> None:
    if not (0 < temperature < math.inf and 0 < energy < math.inf):
        raise OutOfRangeError(
            f"{name} needs temperature > 0 K and activation_energy > 0 J/mol; got {temperature=}, "
            f"activation_energy={energy}"
        )
