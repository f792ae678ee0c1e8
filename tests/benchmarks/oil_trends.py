"""How long 5,000 oil samples take: one long history, and a fleet of 100 machines.

Run by hand: python tests/benchmarks/oil_trends.py. The data are generated, nothing is measured.
"""

import csv
import tempfile
import time
from datetime import date, timedelta
from pathlib import Path

import numpy as np

from rca.base.source import Source
from rca.case.model import Case, Header, HistoryEvent, OilReportFile
from rca.intake.oil_reports import read_oil_reports
from rca.oil.check import check_oil

PROPERTIES = {
    "KV40 [mm2/s]": (46.0, 0.1),
    "TAN [mgKOH/g]": (0.4, 0.03),
    "Water [mg/kg]": (90.0, 10.0),
    "Colour": (2.0, 0.3),
    "Soot [A/cm]": (0.4, 0.2),
    "Nitration [A/cm]": (3.0, 0.3),
    "Oxidation [A/cm]": (5.0, 0.5),
    "PQ": (10.0, 3.0),
} | {
    f"{e} [mg/kg]": (10.0, 2.0)
    for e in ("Fe", "Cu", "Cr", "Al", "Pb", "Sn", "Ni", "Si", "Na", "K", "Ca", "Mg")
}
SOURCE = Source(file="case.toml", locator="benchmark")


def write(path: Path, samples: int, seed: int) -> None:
    """A wide report of generated results; one in ten soot results is a limit."""
    rng = np.random.default_rng(seed)
    with path.open("w", newline="", encoding="utf-8") as out:
        table = csv.writer(out)
        table.writerow(["Sample No", "Sampled", "Machine hours", *PROPERTIES])
        for k in range(samples):
            day = date(1990, 1, 1) + timedelta(days=2 * k)
            cells = [f"{abs(rng.normal(m, s)):.2f}" for m, s in PROPERTIES.values()]
            cells = [
                "<0.5" if title.startswith("Soot") and rng.random() < 0.1 else cell
                for title, cell in zip(PROPERTIES, cells, strict=True)
            ]
            table.writerow([f"S{k}", day, 20 * k, *cells])


def case_of(name: str, changes: int, samples: int) -> Case:
    """A case with evenly spread oil changes."""
    step = samples // (changes + 1)
    days = [date(1990, 1, 1) + timedelta(days=2 * step * k) for k in range(1, changes + 1)]
    return Case(
        header=Header(id="B", title="benchmark"),
        oil_reports=(OilReportFile(file=name, source=SOURCE),),
        history=tuple(
            HistoryEvent(when=d, kind="oil change", text="", source=SOURCE) for d in days
        ),
    )


def main() -> None:
    """Time reading and judging."""
    with tempfile.TemporaryDirectory() as place:
        folder = Path(place)
        for samples, changes, machines in ((5000, 99, 1), (50, 1, 100)):
            write(folder / "a.csv", samples, seed=1)
            case = case_of("a.csv", changes, samples)
            reading_time = judging_time = 0.0
            for _ in range(machines):
                start = time.perf_counter()
                reading = read_oil_reports(folder, case)
                middle = time.perf_counter()
                check = check_oil(case, reading.samples)
                end = time.perf_counter()
                reading_time += middle - start
                judging_time += end - middle
                assert check is not None
            print(
                f"{machines} machine(s), {samples} samples, {changes} oil changes, "
                f"{len(PROPERTIES)} properties: read {reading_time:.1f} s, "
                f"judge and trend {judging_time:.1f} s"
            )


if __name__ == "__main__":
    main()
