"""The sample case: made anew it is the same; its story is in the data and physically possible."""

import math
import sys
from pathlib import Path

import numpy as np
import openpyxl
import polars as pl
import pytest

from rca.intake.read import read_case
from rca.suction.check import check_suction
from rca.workshop import sample_case
from rca.workshop.plant import burst, run, viscosity

TEXT = (".toml", ".txt", ".csv", ".md", ".json")


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("made")
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(sys, "argv", ["sample_case", str(folder)])
        sample_case.main()
    return folder


def names(folder: Path) -> set[str]:
    return {
        p.relative_to(folder).as_posix()
        for p in folder.rglob("*")
        if p.is_file() and "report" not in p.relative_to(folder).parts
    }


@pytest.mark.regression
def test_made_anew_it_is_the_same(made: Path, sample_dir: Path) -> None:
    assert names(made) == names(sample_dir)
    for name in names(made):
        if name.endswith(TEXT):
            assert (made / name).read_bytes() == (sample_dir / name).read_bytes(), name
        elif name.endswith(".parquet"):
            assert pl.read_parquet(made / name).equals(pl.read_parquet(sample_dir / name)), name
        elif name.endswith(".xlsx"):
            assert cells(made / name) == cells(sample_dir / name), name


def cells(path: Path) -> list[tuple[object, ...]]:
    book = openpyxl.load_workbook(path)
    return [row for page in book for row in page.iter_rows(values_only=True)]


def test_it_says_that_it_is_invented_and_stays_small(sample_dir: Path) -> None:
    for name in ("README.txt", "case.toml", *(f"earlier/{p.name}" for p in _earlier(sample_dir))):
        assert "nvented" in (sample_dir / name).read_text(encoding="utf-8"), name
    for line in (sample_dir / "photos/photos.csv").read_text().splitlines()[1:]:
        assert "Generated picture" in line
    assert sum((sample_dir / n).stat().st_size for n in names(sample_dir)) < 12e6


def _earlier(folder: Path) -> list[Path]:
    return sorted((folder / "earlier").glob("*.json"))


@pytest.mark.outside_value(source="ISO 3448: VG 46 is 46 mm2/s +/- 10 % at 40 degC")
def test_the_invented_oil_is_a_vg_46() -> None:
    assert float(viscosity(np.asarray(40.0))) == pytest.approx(46.0, rel=0.10)


@pytest.mark.outside_value(
    source="Hagen-Poiseuille, laminar pipe flow: 128 rho nu L Q / (pi d^4); exact"
)
def test_the_clean_line_of_the_plant_lies_near_exact_pipe_flow() -> None:
    """The plant lumps pipe, bends and valve; the pipe alone has to fit inside its line loss."""
    flow, bore, length, density = 148e-3 / 60, 0.050, 1.8, 850.0
    nu = float(viscosity(np.asarray(50.0))) * 1e-6
    pipe_bar = 128 * density * nu * length * flow / (math.pi * bore**4) / 1e5
    line_bar = 0.0185 * nu / 30e-6 + 0.013
    assert pipe_bar < line_bar < 8 * pipe_bar + 0.03


def test_the_warm_inlet_sinks_through_the_makers_limit_and_cold_starts_are_deeper() -> None:
    log = run(sample_case.SEED)
    warm = (log.oil_degc > 49) & (log.speed_rpm > 1000)
    week = 7 * 86400
    first = log.inlet_bar[warm & (log.time < log.time[0] + week)].mean()
    last_day = log.inlet_bar[warm & (log.time > log.time[-1] - 86400)].mean()
    assert first > 0.90
    assert 0.65 < last_day < 0.75
    cold = (log.oil_degc < 20) & (log.speed_rpm > 1000)
    late = cold & (log.time > log.time[-1] - 2 * week)
    assert log.inlet_bar[late].min() < last_day - 0.15
    assert log.inlet_bar.min() > 0.0


@pytest.mark.outside_value(source="exact: nine pistons at 1480 rpm beat at 9 * 1480 / 60 = 222 Hz")
def test_the_burst_carries_the_piston_frequency() -> None:
    pressure = burst(11)["P_DIS"][30_000:58_000]  # the steady part at working pressure
    spectrum = np.abs(np.fft.rfft((pressure - pressure.mean()) * np.hanning(pressure.size)))
    frequency = np.fft.rfftfreq(pressure.size, 1 / 50_000)
    band = frequency > 50
    assert frequency[band][np.argmax(spectrum[band])] == pytest.approx(222.0, abs=2.0)


def test_the_plant_and_the_budget_agree_on_the_clean_line(sample_dir: Path) -> None:
    """Two models made apart: lumped linear losses against the part-by-part budget."""
    case = read_case(sample_dir).case
    assert case is not None
    budget = check_suction(case, None, seed=1, samples=512).normal
    log = run(sample_case.SEED)
    warm = (log.oil_degc > 49) & (log.speed_rpm > 1000)
    first_day = log.inlet_bar[warm & (log.time < log.time[0] + 86400)].mean()
    assert budget is not None
    assert budget.pressure.mean / 1e5 == pytest.approx(first_day, abs=0.03)
