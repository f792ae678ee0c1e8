"""Pressure losses of a suction line at low Reynolds number: pipe, fitting, strainer, breather."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

FloatArray = npt.NDArray[np.float64]
LAMINAR_LIMIT = 2100.0  # Reynolds number; transition 2100 to 4000 is taken from Churchill
TURBULENT_LIMIT = 4000.0  # Reynolds number
HAGENBACH = 1.25  # extra loss of a developing laminar flow, in velocity heads; 1.2-1.3, White,
# Viscous Fluid Flow, 3rd ed., sec. 3-3 (from memory)

# Two-coefficient fittings K = K1/Re + Kinf (1 + 1/D_inch): W. Hooper, Chemical Engineering,
# 24 August 1981, p. 96 (values as in the ``fluids`` library's table and Hooper's paper, from
# memory where the library has none). Keys are the forms a case may name.
TWO_K: dict[str, tuple[float, float]] = {
    "long-radius bend": (800.0, 0.20),
    "short-radius bend": (800.0, 0.25),
    "45 degree bend": (500.0, 0.20),
    "tee through": (150.0, 0.05),
    "tee branch": (800.0, 0.80),
    "ball valve": (300.0, 0.10),
    "gate valve": (300.0, 0.10),
    "butterfly valve": (800.0, 0.25),
    "check valve": (1500.0, 1.5),
}
# Entrances: K = 160/Re + Kinf, no size term (Hooper 1981); a rounded entrance and a bellmouth by
# Idelchik's rounded inlet, r/D 0.1 and 0.2 (from memory).
ENTRANCES: dict[str, tuple[float, float]] = {
    "sharp entrance": (160.0, 0.50),
    "rounded entrance": (160.0, 0.12),
    "bellmouth": (160.0, 0.03),
}


def reynolds(flow: FloatArray, bore: float, nu: FloatArray) -> FloatArray:
    """Reynolds number of a round bore: 4 Q / (pi D nu); flow [m3/s], bore [m], nu [m2/s]."""
    return np.asarray(4.0 * np.abs(flow) / (np.pi * bore * nu))


def darcy_friction(re: float | FloatArray, relative_roughness: float) -> FloatArray:
    """Darcy friction factor, laminar and turbulent.

    64/Re below 2100; above, Churchill's formula, which also spans the transition. Within 3 % of
    Colebrook for Re above 4000; in the transition any value is uncertain by tens of per cent.
    Source: S. Churchill, Chemical Engineering 84(24), 1977, p. 91.
    Raises OutOfRangeError unless Re > 0 and 0 <= e/D <= 0.05.
    """
    r = np.asarray(re, dtype=float)
    if not (np.all(r > 0.0) and 0.0 <= relative_roughness <= 0.05):
        raise OutOfRangeError(
            f"darcy_friction needs Re > 0 and 0 <= e/D <= 0.05; got Re {re}, {relative_roughness}"
        )
    a = (2.457 * np.log(1.0 / ((7.0 / r) ** 0.9 + 0.27 * relative_roughness))) ** 16
    b = (37530.0 / r) ** 16
    churchill = 8.0 * ((8.0 / r) ** 12 + (a + b) ** -1.5) ** (1.0 / 12.0)
    return np.asarray(np.where(r < LAMINAR_LIMIT, 64.0 / r, churchill))


def pipe_loss(
    flow: FloatArray,
    bore: float,
    length: float,
    roughness: float,
    nu: FloatArray,
    rho: float | FloatArray,
) -> FloatArray:
    """Friction loss of a straight pipe [Pa]: f (L/D) rho V^2/2; Darcy and Weisbach."""
    velocity = np.abs(flow) / (np.pi / 4.0 * bore**2)
    re = np.maximum(reynolds(flow, bore, nu), 1e-9)
    return np.asarray(
        darcy_friction(re, roughness / bore) * length / bore * 0.5 * rho * velocity**2
    )


def entry_loss(
    flow: FloatArray, bore: float, length: float, nu: FloatArray, rho: float | FloatArray
) -> FloatArray:
    """Extra loss of a flow that develops along the pipe [Pa]; laminar flow.

    1.25 velocity heads over the entrance length 0.06 Re D, less in proportion where the pipe is
    shorter; fades out between Re 2100 and 4000, as a turbulent flow develops within a few bores.
    An estimate within about 20 %.
    """
    velocity = np.abs(flow) / (np.pi / 4.0 * bore**2)
    re = np.maximum(reynolds(flow, bore, nu), 1e-9)
    share = np.minimum(1.0, length / (0.06 * re * bore))
    laminar = np.clip((TURBULENT_LIMIT - re) / (TURBULENT_LIMIT - LAMINAR_LIMIT), 0.0, 1.0)
    return np.asarray(HAGENBACH * share * laminar * 0.5 * rho * velocity**2)


def kinetic_coefficient(re: FloatArray) -> FloatArray:
    """Kinetic energy of a pipe flow over that of its mean speed [-].

    2 laminar (exact), 1.06 turbulent (one-seventh power profile), straight between Re 2100 and
    4000. Source: White, Fluid Mechanics, sec. 3.7 (from memory).
    """
    share = np.clip((re - LAMINAR_LIMIT) / (TURBULENT_LIMIT - LAMINAR_LIMIT), 0.0, 1.0)
    return np.asarray(2.0 - 0.94 * share)


def fitting_coefficient(form: str, re: FloatArray, bore: float) -> FloatArray:
    """Loss coefficient of a fitting at any Reynolds number, referred to its bore.

    Source: Hooper's two-coefficient method, see ``TWO_K`` and ``ENTRANCES``. At Re 50 it is some
    twenty to forty times the turbulent value that handbooks print.
    Raises OutOfRangeError for a form without coefficients.
    """
    safe = np.maximum(re, 1e-9)
    if form in ENTRANCES:
        k1, k_inf = ENTRANCES[form]
        return np.asarray(k1 / safe + k_inf)
    if form not in TWO_K:
        raise OutOfRangeError(
            f"no coefficients for the fitting {form!r}; give loss_coefficient in the case"
        )
    k1, k_inf = TWO_K[form]
    return np.asarray(k1 / safe + k_inf * (1.0 + 0.0254 / bore))


def reducer_coefficient(re: FloatArray, bore: float, outlet_bore: float) -> FloatArray:
    """Loss coefficient of a sudden change of bore, referred to the inlet bore.

    Narrowing: 0.5 (1 - b^2) / b^4 with b the ratio of bores, plus 160/Re; widening by Borda and
    Carnot, (1 - b^-2)^2. Source: Crane TP-410 (form; from memory), laminar term Hooper 1981.
    """
    safe = np.maximum(re, 1e-9)
    ratio = outlet_bore / bore
    if ratio < 1.0:
        return np.asarray((160.0 / safe + 0.5 * (1.0 - ratio**2)) / ratio**4)
    return np.asarray(160.0 / safe + (1.0 - ratio**-2) ** 2)


def strainer_loss(
    flow: FloatArray,
    nu: FloatArray,
    *,
    rated_flow: float,
    rated_loss: float,
    rated_nu: float,
    open_share: float | FloatArray = 1.0,
) -> FloatArray:
    """Loss of a mesh strainer [Pa], scaled from its rated point.

    Proportional to flow and viscosity (creeping flow through the mesh, exact there); a clogged
    mesh loses (1 / open share)^2.5, common practice, no source: exponents 2 to 3 are met.
    """
    return np.asarray(
        rated_loss * (np.abs(flow) / rated_flow) * (nu / rated_nu) / np.asarray(open_share) ** 2.5
    )


def breather_loss(
    air_flow: FloatArray, *, rated_flow: float, rated_loss: float, open_share: float = 1.0
) -> FloatArray:
    """Depression of the reservoir [Pa] by air drawn through the breather.

    Proportional to flow^1.5: paper follows flow^1 (dirty) to flow^2 (clean); common practice, no
    source. Zero where no air is drawn.
    """
    return np.asarray(rated_loss * (np.maximum(air_flow, 0.0) / rated_flow) ** 1.5 / open_share**2)
