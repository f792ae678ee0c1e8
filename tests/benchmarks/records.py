"""Reading long records: time and peak memory beside what plain engines need for the same file.

    python -m tests.benchmarks.records [--rows 20000000] [--folder DIR]

Writes a made record (one row a second, five channels: 20 million rows are about 1 GB of CSV), then
reads it in fresh processes: parsing and summing with Polars, DuckDB and Arrow, and our reading
with the events below a limit. Printed are seconds, the peak of resident memory and the ratio to
the fastest plain engine of the same file.
"""

import argparse
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ENGINES = ("polars", "duckdb", "arrow", "rca")
START = 1_767_225_600  # 2026-01-01 UTC
CHUNK = 500_000


def write(folder: Path, rows: int) -> None:
    """``record.csv`` and ``record.parquet``: a pump that runs by day, with dips at the inlet."""
    import numpy as np
    import polars as pl

    rng = np.random.default_rng(7)
    with (folder / "record.csv").open("wb") as stream:
        for first in range(0, rows, CHUNK):
            k = np.arange(first, min(first + CHUNK, rows))
            hour = (k / 3600.0) % 24.0
            run = (hour > 6) & (hour < 22)
            dip = (k % 86_400 > 30_000) & (k % 86_400 < 30_020)
            frame = pl.DataFrame(
                {
                    "Time": pl.Series(START + k).cast(pl.Int64) * 1_000_000,
                    "P": np.where(run, 0.95, 1.04) - 0.3 * dip + rng.normal(0, 0.01, k.size),
                    "D": np.where(run, 210.0, 0.0) + rng.normal(0, 2.0, k.size),
                    "T": 25.0 + 25.0 * run + rng.normal(0, 0.2, k.size),
                    "N": np.where(run, 1480.0, 0.0),
                    "L": 400.0 + rng.normal(0, 1.0, k.size),
                }
            ).with_columns(pl.col("Time").cast(pl.Datetime("us")).dt.strftime("%Y-%m-%d %H:%M:%S"))
            frame.write_csv(stream, include_header=first == 0, float_precision=4)
    pl.scan_csv(folder / "record.csv", try_parse_dates=True).sink_parquet(
        folder / "record.parquet"
    )


def read(engine: str, path: Path) -> str:
    """One engine over one file; what it found, to show that it looked."""
    return {"polars": _polars, "duckdb": _duckdb, "arrow": _arrow, "rca": _rca}[engine](path)


def _polars(path: Path) -> str:
    import polars as pl

    lazy = (
        pl.scan_parquet(path)
        if path.suffix == ".parquet"
        else pl.scan_csv(path, try_parse_dates=True)
    )
    found = lazy.select(pl.col("P", "D", "T", "N", "L").sum(), pl.col("Time").max())
    return str(found.collect(engine="streaming").row(0)[0])


def _duckdb(path: Path) -> str:
    import duckdb

    query = f"select sum(P), sum(D), sum(T), sum(N), sum(L), max(Time) from '{path}'"
    return str(duckdb.sql(query).fetchall()[0][0])


def _arrow(path: Path) -> str:
    import pyarrow.compute as pc
    import pyarrow.csv
    import pyarrow.parquet

    total = 0.0
    if path.suffix == ".parquet":
        batches = pyarrow.parquet.ParquetFile(path).iter_batches()
    else:
        batches = iter(pyarrow.csv.open_csv(path))
    for batch in batches:
        total += sum(pc.sum(batch.column(n)).as_py() for n in ("P", "D", "T", "N", "L"))
        pc.max(batch.column("Time"))
    return str(total)


def _rca(path: Path) -> str:
    from rca.base.source import Source
    from rca.case.model import Case, Channel, Header, RecordFile, TimeAxis
    from rca.intake.record_files import read_records

    channels = (
        Channel(column="P", quantity="inlet pressure", unit="bar(a)"),
        Channel(column="D", quantity="discharge pressure", unit="bar(g)"),
        Channel(column="T", quantity="oil temperature", unit="degC"),
        Channel(column="N", quantity="shaft speed", unit="rpm"),
        Channel(column="L", quantity="reservoir level", unit="mm"),
    )
    record = RecordFile(
        file=path.name,
        time=TimeAxis(column="Time", zone="UTC"),
        channels=channels,
        source=Source(file="case.toml", locator="records[0]"),
    )
    case = Case(header=Header(id="B", title="benchmark"), records=(record,))
    found = read_records(path.parent, case, atmosphere=101325.0, limit=0.8e5)
    assert not found.problems, found.problems
    assert found.spells is not None
    return f"{len(found.spells)} spells"


def _measured(engine: str, path: Path) -> tuple[float, float, str]:
    """(seconds, peak MB, finding) of a fresh process."""
    done = subprocess.run(
        [
            sys.executable,
            "-m",
            "tests.benchmarks.records",
            "--engine",
            engine,
            "--file",
            str(path),
        ],
        check=True,
        capture_output=True,
        text=True,
    )
    seconds, peak, finding = done.stdout.strip().split(" ", 2)
    return float(seconds), float(peak), finding


def _peak_mb() -> float:
    """Peak resident memory of this process; getrusage would count the parent's as well."""
    for line in Path("/proc/self/status").read_text().splitlines():
        if line.startswith("VmHWM"):
            return int(line.split()[1]) / 1024.0
    return float("nan")


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--rows", type=int, default=20_000_000)
    parser.add_argument("--folder", type=Path)
    parser.add_argument("--engine", choices=ENGINES)
    parser.add_argument("--file", type=Path)
    options = parser.parse_args()
    if options.engine:
        start = time.perf_counter()
        finding = read(options.engine, options.file)
        peak = _peak_mb()
        print(f"{time.perf_counter() - start:.3f} {peak:.0f} {finding}")
        return
    with tempfile.TemporaryDirectory() as scratch:
        folder = options.folder or Path(scratch)
        if not (folder / "record.parquet").exists():
            write(folder, options.rows)
        for name in ("record.csv", "record.parquet"):
            path = folder / name
            rows = {engine: _measured(engine, path) for engine in ENGINES}
            fastest = min(rows[e][0] for e in ENGINES[:-1])
            print(f"\n{name}, {path.stat().st_size / 1e9:.2f} GB")
            for engine, (seconds, peak, finding) in rows.items():
                ratio = seconds / fastest
                print(f"  {engine:<7} {seconds:7.2f} s  {ratio:5.2f}  {peak:6.0f} MB  {finding}")


if __name__ == "__main__":
    main()
