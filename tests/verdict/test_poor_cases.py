"""Cases with little in them: a report every time, and no side where nothing carries one."""

import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner

from rca.cli.main import main


def keep_tables(text: str, wanted: tuple[str, ...]) -> str:
    """The descriptor without the tables that are not wanted."""
    import re

    parts = re.split(r"(?m)^(?=\[)", text)
    return "".join(
        p
        for p in parts
        if p.lstrip("[").split("]")[0].split(".")[0] in wanted or not p.startswith("[")
    )


@pytest.mark.notebook
@pytest.mark.pdf
@pytest.mark.parametrize(
    ("wanted", "folders"),
    [
        (("case",), ()),
        (("case", "pump", "suction_line"), ("teardown",)),
    ],
)
def test_a_poor_case_gets_its_report(
    tmp_path: Path, sample_dir: Path, wanted: tuple[str, ...], folders: tuple[str, ...]
) -> None:
    case = tmp_path / "case"
    case.mkdir()
    text = (sample_dir / "case.toml").read_text(encoding="utf-8")
    (case / "case.toml").write_text(keep_tables(text, wanted), encoding="utf-8")
    for name in folders:
        shutil.copytree(sample_dir / name, case / name)
    done = CliRunner().invoke(
        main, ["report", str(case), "--json", "--parameters", '{"draws": 64}']
    )
    assert done.exit_code == 0, done.output
    if not folders:
        assert '"side": "undetermined"' in done.output
