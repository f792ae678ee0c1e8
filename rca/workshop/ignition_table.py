"""Make the shipped table of ignition delays from detailed kinetics.

    python -m rca.workshop.ignition_table [--out FILE]

Cantera with its shipped mechanism ``nDodecane_Reitz.yaml`` (Wang, Ra, Jia, Reitz, Fuel 136 (2014)
25-36): n-dodecane vapour in oxygen and nitrogen (argon counted as nitrogen), homogeneous, constant pressure, ideal gas.
The delay is the time to the steepest temperature rise of the main ignition. Takes some minutes.
"""

import argparse
import hashlib
import json
from pathlib import Path
from typing import Any

import numpy as np

MECHANISM, PHASE, FUEL = "nDodecane_Reitz.yaml", "nDodecane_IG", "c12h26"
TEMPERATURES = (
    600.0, 650.0, 700.0, 750.0, 775.0, 800.0, 825.0, 850.0, 875.0, 900.0, 950.0, 1000.0, 1050.0,
    1100.0, 1150.0, 1200.0, 1300.0, 1400.0, 1500.0,
)  # fmt: skip
PRESSURES_BAR = (10.0, 20.0, 30.0, 50.0, 80.0, 120.0, 170.0, 250.0, 350.0, 450.0)
PHIS = (0.5, 1.0, 2.0)
# oxygen in the air [-]: free air, and air out of solution in fresh oil (ASTM D2779, 25 degC)
OXYGENS = (0.2095, 0.35)
LONGEST = 5.0  # [s]
RISE = 300.0  # [K] that counts as ignition


def mechanism_file() -> Path:
    """Where the library keeps the mechanism."""
    import cantera as ct  # noqa: PLC0415 - only the workshop needs it

    for folder in ct.get_data_directories():
        found = Path(folder) / MECHANISM
        if found.is_file():
            return found
    raise FileNotFoundError(MECHANISM)


def ignition_delay_of(
    temperature: float, pressure_bar: float, phi: float, oxygen: float, *, gas: Any = None
) -> float:
    """Delay of one mixture [s]; inf where nothing ignites within ``LONGEST``."""
    import cantera as ct  # noqa: PLC0415 - only the workshop needs it

    mix = gas if gas is not None else ct.Solution(MECHANISM, PHASE)
    mix.set_equivalence_ratio(phi, f"{FUEL}:1", f"o2:{oxygen}, n2:{1.0 - oxygen}")
    mix.TP = temperature, pressure_bar * 1e5
    reactor = ct.IdealGasConstPressureMoleReactor(mix, clone=False)
    net = ct.ReactorNet([reactor])
    net.rtol, net.atol = 1e-7, 1e-14
    net.max_steps = 200_000
    before_t, before, steepest, delay = 0.0, temperature, 0.0, np.inf
    while net.time < LONGEST:
        net.step()
        slope = (reactor.T - before) / (net.time - before_t)
        if slope > steepest and temperature + RISE < reactor.T:
            steepest, delay = slope, 0.5 * (net.time + before_t)
        elif np.isfinite(delay) and net.time > 1.5 * delay:
            break
        before_t, before = net.time, reactor.T
    return float(delay)


def make() -> dict[str, Any]:
    """The whole table with where it came from."""
    import cantera as ct  # noqa: PLC0415 - only the workshop needs it

    gas = ct.Solution(MECHANISM, PHASE)
    delays = [
        [
            [
                [round_4(ignition_delay_of(t, p, phi, oxygen, gas=gas)) for p in PRESSURES_BAR]
                for t in TEMPERATURES
            ]
            for phi in PHIS
        ]
        for oxygen in OXYGENS
    ]
    return {
        "quantity": "ignition delay [s]: oxygen x phi x temperature x pressure",
        "definition": "time of the steepest temperature rise of the main ignition, homogeneous "
        "vapour, constant pressure, ideal gas",
        "fuel": "n-dodecane",
        "mechanism": MECHANISM,
        "phase": PHASE,
        "mechanism_source": "Wang, Ra, Jia, Reitz, Fuel 136 (2014) 25-36",
        "mechanism_sha256": hashlib.sha256(mechanism_file().read_bytes()).hexdigest(),
        "library": f"Cantera {ct.__version__}",
        "made_by": "rca.workshop.ignition_table",
        "oxygen": OXYGENS,
        "phi": PHIS,
        "temperature_k": TEMPERATURES,
        "pressure_bar": PRESSURES_BAR,
        "delay_s": delays,
    }


def text_of(table: dict[str, Any]) -> str:
    """JSON with one row of pressures a line, so that a change can be read."""
    lines = [f" {json.dumps(k)}: {json.dumps(v)}" for k, v in table.items() if k != "delay_s"]
    blocks = []
    for by_phi in table["delay_s"]:
        inner = [
            "   [\n" + ",\n".join(f"    {json.dumps(row)}" for row in rows) + "\n   ]"
            for rows in by_phi
        ]
        blocks.append("  [\n" + ",\n".join(inner) + "\n  ]")
    lines.append(' "delay_s": [\n' + ",\n".join(blocks) + "\n ]")
    return "{\n" + ",\n".join(lines) + "\n}\n"


def round_4(value: float) -> float:
    """Four digits: the kinetics are good to a factor of one and a half."""
    return float(f"{value:.4g}")


def main() -> None:
    """Write the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    default = Path(__file__).parents[1] / "discharge" / "ignition_delay.json"
    parser.add_argument("--out", type=Path, default=default)
    out = parser.parse_args().out
    out.write_text(text_of(make()), encoding="utf-8")
    print(f"{out}: written")


if __name__ == "__main__":
    main()
