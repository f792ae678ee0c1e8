"""All properties of a hydraulic fluid at one temperature and pressure; measured values win."""

from dataclasses import dataclass

from rca.physics.bulk_modulus import density_under_pressure, heat_capacity_ratio, tangent_modulus
from rca.physics.fluid_class import class_values, density
from rca.physics.oil_thermal import (
    petroleum_conductivity,
    petroleum_heat_capacity,
    surface_tension,
)
from rca.physics.vapour import class_vapour_pressure
from rca.physics.viscosity import grade_viscosities, kinematic_viscosity


@dataclass(frozen=True, slots=True, kw_only=True)
class FluidState:
    """Properties of a bubble-free fluid at one state, SI, and which of them are class values."""

    density: float  # [kg/m3]
    viscosity: float | None  # kinematic, at atmospheric pressure [m2/s]; None where unknown
    isentropic_modulus: float  # tangent [Pa]
    isothermal_modulus: float  # tangent [Pa]
    heat_capacity: float  # [J/(kg K)]
    conductivity: float  # [W/(m K)]
    tension: float  # [N/m]
    vapour_pressure: tuple[float, float, float]  # 5, 50, 95 % [Pa]
    bunsen: float  # of air [-]
    class_values: tuple[str, ...]  # names of the inputs that are class values, not this fluid's


def fluid_state(
    name: str,
    temperature: float,
    pressure: float = 101325.0,
    *,
    density_15: float | None = None,
    nu_40: float | None = None,
    nu_100: float | None = None,
    iso_vg: int | None = None,
    bulk_modulus: float | None = None,
    flash_point: float | None = None,
    bunsen: float | None = None,
) -> FluidState:
    """Properties of a class of fluid at ``temperature`` [K] and ``pressure`` [Pa abs].

    What is given of this fluid wins over the class: ``density_15`` [kg/m3], ``nu_40`` with
    ``nu_100`` [m2/s] or else ``iso_vg``, ``bulk_modulus`` isentropic at 50 degC [Pa],
    ``flash_point`` [K], ``bunsen`` [-]. 253-393 K, up to 100 MPa; viscosity is that at atmospheric
    pressure (see ``pressure_viscosity``), no free air (see ``effective_modulus``). Each property
    errs as its own function says. Raises OutOfRangeError outside a property's range.
    """
    values = class_values(name)
    given = {
        "density": density_15, "viscosity": nu_40 if nu_100 is not None else None,
        "bulk modulus": bulk_modulus, "flash point": flash_point, "Bunsen coefficient": bunsen,
    }  # fmt: skip
    rho_15 = values.density_15 if density_15 is None else density_15
    rho = density(temperature, rho_15, values.expansion)
    # the petroleum forms are asked only where the class has no value of its own
    cp = values.heat_capacity or float(petroleum_heat_capacity(temperature, rho_15))
    k = values.conductivity or float(petroleum_conductivity(temperature, rho_15))
    modulus_50 = values.bulk_modulus if bulk_modulus is None else bulk_modulus
    at_rest = float(tangent_modulus(0.0, temperature, modulus_50))
    isentropic = float(tangent_modulus(pressure, temperature, modulus_50))
    ratio = float(
        heat_capacity_ratio(
            isentropic, expansion=values.expansion, temperature=temperature, density=rho,
            heat_capacity=cp,
        )
    )  # fmt: skip
    low, middle, high = class_vapour_pressure(name, temperature, flash_point=flash_point)
    return FluidState(
        density=float(density_under_pressure(rho, pressure, at_rest / ratio)),
        viscosity=_viscosity(temperature, nu_40, nu_100, iso_vg),
        isentropic_modulus=isentropic,
        isothermal_modulus=isentropic / ratio,
        heat_capacity=cp,
        conductivity=k,
        tension=float(surface_tension(temperature, values.surface_tension)),
        vapour_pressure=(float(low), float(middle), float(high)),
        bunsen=values.bunsen if bunsen is None else bunsen,
        class_values=tuple(key for key, value in given.items() if value is None),
    )


def _viscosity(
    temperature: float, nu_40: float | None, nu_100: float | None, iso_vg: int | None
) -> float | None:
    """From two measured points, or the grade's mid-point; None where neither is given."""
    if nu_40 is not None and nu_100 is not None:
        return float(kinematic_viscosity(temperature, nu_40, nu_100))
    if iso_vg is not None:
        return float(kinematic_viscosity(temperature, *grade_viscosities(iso_vg)))
    return None
