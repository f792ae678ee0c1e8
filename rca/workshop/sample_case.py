"""Make the sample case anew: ``python -m rca.workshop.sample_case [FOLDER]``.

Everything in it is invented. Its answer is written nowhere; it follows from the data that the
invented plant, laboratory and teardown leave behind.
"""

import json
import sys
from datetime import date, datetime, timedelta
from pathlib import Path

import numpy as np
import openpyxl
import polars as pl

from rca.case.vocabulary import MECHANISMS
from rca.workshop import texts
from rca.workshop.pictures import Picture, draw
from rca.workshop.plant import FAILURE, ZONE, Log, burst, run, stamp

SEED = 20260306
LOGGER_FAST_S = 42.0
CSV_WEEKS = 2.5


def main() -> None:
    """Write the sample case into a folder, by default ``sample_case`` here."""
    folder = Path(sys.argv[1] if len(sys.argv) > 1 else "sample_case")
    for name in ("oil", "pressure", "photos", "teardown", "earlier"):
        (folder / name).mkdir(parents=True, exist_ok=True)
    (folder / "case.toml").write_text(texts.CASE, encoding="utf-8")
    for name, text in texts.FILES.items():
        (folder / name).write_text(text, encoding="utf-8")
    _records(folder / "pressure")
    _oil(folder / "oil")
    _photos(folder / "photos")
    _earlier(folder / "earlier")


def _records(folder: Path) -> None:
    log = run(SEED)
    split = FAILURE.timestamp() - CSV_WEEKS * 7 * 86400
    gap = (
        datetime(2026, 2, 11, 10, 0, tzinfo=ZONE).timestamp(),
        datetime(2026, 2, 12, 3, 0, tzinfo=ZONE).timestamp(),
    )
    early = (log.time < split) & ~((log.time >= gap[0]) & (log.time < gap[1]))
    late = log.time >= split
    stamps = [stamp(t + LOGGER_FAST_S) for t in log.time]
    frame = _frame(log, stamps)
    frame.filter(pl.Series(early)).write_parquet(folder / "slow-until-february.parquet")
    lines = ["Timestamp,P_SUCT,P_DIS,T_OIL,N,LEVEL"]
    for row in frame.filter(pl.Series(late)).iter_rows():
        lines.append(f"{row[0]},{row[1]:.3f},{row[2]:.1f},{row[3]:.1f},{row[4]:.1f},{row[5]:.3f}")
    place = len(lines) // 2
    lines[place] = lines[place].replace(lines[place].split(",")[1], "ERR", 1)
    (folder / "slow.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    for number, seed in ((1, 11), (2, 12)):
        columns = burst(seed)
        pl.DataFrame(
            {k: np.round(v, 4).astype(np.float32) for k, v in columns.items()}
        ).write_parquet(folder / f"fast-{number}.parquet")


def _frame(log: Log, stamps: list[str]) -> pl.DataFrame:
    return pl.DataFrame(
        {
            "Timestamp": stamps,
            "P_SUCT": np.round(log.inlet_bar, 3),
            "P_DIS": np.round(log.discharge_bar, 1),
            "T_OIL": np.round(log.oil_degc, 1),
            "N": log.speed_rpm,
            "LEVEL": np.round(log.level_m, 3),
        }
    )


def _oil(folder: Path) -> None:
    rows_a, rows_b = texts.oil_rows(np.random.default_rng(SEED))
    header = texts.OIL_HEADER_A
    lines = [";".join(header)]
    for row in rows_a:
        lines.append(";".join(_decimal_comma(cell) for cell in row))
    (folder / "lab-export.csv").write_text("\n".join(lines) + "\n", encoding="cp1252")
    book = openpyxl.Workbook()
    book.properties.created = book.properties.modified = datetime(2026, 3, 20)  # noqa: DTZ001
    page = book.active
    assert page is not None
    page.title = "Results"
    page.append(["Invented laboratory B, results of used oil", *[None] * 5])
    page.append([])
    page.append(texts.OIL_HEADER_B)
    for row_b in rows_b:
        page.append(row_b)
    book.save(folder / "lab-b-2026.xlsx")


def _decimal_comma(cell: object) -> str:
    return str(cell).replace(".", ",") if isinstance(cell, float) else str(cell)


def _photos(folder: Path) -> None:
    base = datetime(2026, 3, 9, 9, 5, tzinfo=ZONE)
    plates = (
        ("p01-valve-plate.jpg", "overall", 1, 20),
        ("p02-inlet-kidney.jpg", "pitted kidney", 1, 10),
        ("p03-transition-land.jpg", "burnt land", 6, 10),
        ("p04-cylinder-bore.jpg", "pitted bore", 1, 5),
        ("p05-piston-seal.jpg", "charred seal", 3, 10),
        ("p06-strainer.jpg", "clogged mesh", 1, 10),
        ("p07-patch.jpg", "patch", 1, 10),
        ("p08-oil-glass.jpg", "oil glass", 6, 20),
        ("p09-return-filter.jpg", "filter medium", 1, 10),
    )
    for number, (file, subject, orientation, bar) in enumerate(plates):
        draw(
            Picture(
                file=file,
                subject=subject,
                taken=base + timedelta(minutes=11 * number),
                orientation=orientation,
                bar_mm=bar,
            ),
            folder,
            SEED + number,
        )


def _earlier(folder: Path) -> None:
    """Results of five earlier invented incidents, in the shape of ``results.json``."""
    for number, (case, title, asset, day, side, sides, top, cause) in enumerate(texts.EARLIER):
        mechanisms = dict.fromkeys(MECHANISMS, 0.05) | top
        plain = {
            "format": 1,
            "invented": "an invented incident for comparison, not a finding on real machinery",
            "case": {
                "id": case,
                "title": title,
                "asset": asset,
                "site": "Harrow Creek panel mill (invented)",
                "occurred": f"{date.fromisoformat(day).isoformat()}T06:00:00+01:00",
            },
            "verdict": {
                "side": side,
                "sides": dict(
                    zip(("suction", "discharge", "both", "neither"), sides, strict=True)
                ),
                "mechanisms": mechanisms,
                "sensitivity": [],
                "next_tests": [],
            },
            "causes": [{"cause": cause, "probability": 0.8, "evidence": []}],
            "evidence": [],
            "checks": {k: {} for k in ("suction", "discharge", "oil", "records", "damage")},
            "actions": [],
            "limits": [],
            "record": {
                "inputs": {},
                "versions": {"rca": "0.0.0"},
                "knowledge": "before this program; entered by hand",
                "seed": number,
            },
        }
        (folder / f"{case}.json").write_text(
            json.dumps(plain, indent=2, sort_keys=True) + "\n", encoding="utf-8"
        )


if __name__ == "__main__":
    main()
