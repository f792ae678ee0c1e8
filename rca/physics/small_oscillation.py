"""Small oscillations of a gas bubble: effective exponent, resonance and damping."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]
Complex = npt.NDArray[np.complex128]


@dataclass(frozen=True, slots=True, kw_only=True)
class Oscillation:
    """How a bubble answers a small pressure oscillation; arrays of one shape."""

    exponent: Floats  # effective polytropic exponent [-]
    resonance: Floats  # angular frequency of free breathing [rad/s]; 0 where it can't swing
    thermal: Floats  # damping by conduction in the gas [1/s]
    viscous: Floats  # by the liquid's viscosity [1/s]
    acoustic: Floats  # by radiation of sound [1/s]

    @property
    def damping(self) -> Floats:
        """All three [1/s]: the amplitude of a free oscillation falls as exp(-damping t)."""
        return np.asarray(self.thermal + self.viscous + self.acoustic)


def thermal_transfer(chi: npt.ArrayLike, *, gamma: float = 1.4) -> Complex:
    """Complex stiffness Phi of the gas: p'/p0 = -Phi R'/R0 [-]; the exponent is Re(Phi)/3.

    ``chi`` = alpha/(omega R^2) [-]; Phi = 3 gamma/{1 - 3 (gamma - 1) i chi [(i/chi)^0.5
    coth (i/chi)^0.5 - 1]}. Wall at constant temperature (true in oil), ideal gas. Imaginary part
    positive: the pressure leads the compression and takes work from it.
    Source: Prosperetti, J. Acoust. Soc. Am. 61 (1977) 17-27.
    Raises OutOfRangeError unless chi > 0 and gamma > 1.
    """
    x = np.asarray(chi, dtype=float)
    if not (np.all((x > 0) & np.isfinite(x)) and gamma > 1):
        raise OutOfRangeError(
            f"thermal_transfer needs chi > 0 and gamma > 1; got {chi!r}, gamma={gamma}"
        )
    root = np.sqrt(1j / x)
    # coth - 1/z loses all digits for small z (large chi): the series serves there
    small = np.abs(root) < 1e-2
    safe = np.where(small, 1.0, root)
    bracket = np.where(small, root**2 / 3 - root**4 / 45, safe / np.tanh(safe) - 1)
    return np.asarray(3 * gamma / (1 - 3 * (gamma - 1) * 1j * x * bracket))


def small_oscillation(
    radius: npt.ArrayLike,
    omega: npt.ArrayLike,
    *,
    pressure: npt.ArrayLike,
    gas_diffusivity: npt.ArrayLike,
    density: float,
    viscosity: float,
    tension: float,
    sound_speed: float,
    gamma: float = 1.4,
) -> Oscillation:
    """Exponent, resonance and damping of a bubble driven at ``omega``; inputs broadcast.

    ``radius`` [m], ``omega`` [rad/s], ``pressure`` of the liquid at rest [Pa abs],
    ``gas_diffusivity`` [m2/s] at that state; liquid ``density`` [kg/m3], ``viscosity`` [Pa s],
    ``tension`` [N/m], ``sound_speed`` [m/s]. Linear: amplitudes up to a few per cent, wavelength
    far above the radius. Thermal p_g Im(Phi)/(2 rho omega R^2), viscous 2 mu/(rho R^2), acoustic
    omega^2 R/(2 c); resonance sqrt{[p_g Re(Phi) - 2 sigma/R]/(rho R^2)}.
    Source: Prosperetti, J. Acoust. Soc. Am. 61 (1977) 17-27.
    Raises OutOfRangeError unless all are positive and omega R/c < 0.3, or for NaN.
    """
    r, w, p, alpha = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (radius, omega, pressure, gas_diffusivity))
    )
    liquid = (density, viscosity, tension, sound_speed)
    if not (all(bool(np.all((v > 0) & np.isfinite(v))) for v in (r, w, p, alpha))
            and all(0 < v < np.inf for v in liquid)):  # fmt: skip
        raise OutOfRangeError(
            "small_oscillation needs positive finite radius, omega, pressure, diffusivity and "
            f"liquid properties; got {radius!r}, {omega!r}, {pressure!r}, {gas_diffusivity!r}, "
            f"{liquid}"
        )
    if np.any(w * r / sound_speed >= 0.3):
        raise OutOfRangeError(
            f"small_oscillation needs omega R/c < 0.3; got {omega!r} rad/s, {radius!r} m"
        )
    phi = thermal_transfer(alpha / (w * r**2), gamma=gamma)
    gas = p + 2.0 * tension / r
    stiffness = gas * phi.real - 2.0 * tension / r
    return Oscillation(
        exponent=np.asarray(phi.real / 3.0),
        resonance=np.sqrt(np.maximum(stiffness, 0.0) / density) / r,
        thermal=np.asarray(gas * phi.imag / (2.0 * density * w * r**2)),
        viscous=np.asarray(2.0 * viscosity / (density * r**2)),
        acoustic=np.asarray(w**2 * r / (2.0 * sound_speed)),
    )
