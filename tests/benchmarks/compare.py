"""Ten thousand invented results: gathered, indexed, asked, compared.

    python -m tests.benchmarks.compare [COUNT] [SIZE_KB]

Each file is filled up to SIZE_KB (330, the sample's size) with numbers nobody asks for, because a
real results.json is mostly that.
"""

import json
import sys
import time
from datetime import date
from pathlib import Path
from tempfile import TemporaryDirectory

from rca.compare.check import compare_cases
from rca.compare.explorer import explorer_data
from rca.compare.gather import gather
from rca.compare.index import ask, read_index, write_index
from rca.compare.similar import most_like
from tests.compare.made import many

QUESTIONS = {
    "count, downtime and cost by cause": "SELECT main_cause, count(*), sum(downtime_h), sum(cost) FROM incidents GROUP BY ALL",
    "mechanisms by year": "SELECT year(occurred), name, count(*) FROM incidents JOIN mechanisms USING (n) WHERE p >= 0.5 GROUP BY ALL",
    "machines where a cause came back": "SELECT site, asset, main_cause, count(*) AS c FROM incidents GROUP BY ALL HAVING c > 1",
    "overdue actions": "SELECT id, due FROM actions WHERE done IS NULL AND due < DATE '2026-12-01'",
}


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 10_000
    size = int(sys.argv[2]) if len(sys.argv) > 2 else 330
    with TemporaryDirectory() as name:
        folder = Path(name)
        ballast = [0.123456789012345 + k for k in range(size * 1000 // 20)]
        for one in many(count):
            one["checks"]["discharge"] = {"samples": ballast}
            (folder / f"{one['case']['id']}.json").write_text(json.dumps(one))
        total = sum(p.stat().st_size for p in folder.iterdir()) / 2**20
        print(f"{count} results, {total:.0f} MiB")
        start = time.perf_counter()
        gathered = gather([folder])
        read = time.perf_counter()
        index = folder / "incidents.duckdb"
        write_index(index, gathered)
        written = time.perf_counter()
        print(
            f"read {read - start:.1f} s, indexed {written - read:.1f} s, together {written - start:.1f} s (aim 60)"
        )
        for what, sql in QUESTIONS.items():
            start = time.perf_counter()
            rows = ask(index, sql)
            print(f"{what}: {len(rows)} rows in {time.perf_counter() - start:.3f} s (aim 1)")
        start = time.perf_counter()
        table, _, _ = read_index(index)
        loaded = time.perf_counter()
        most_like(table, len(table) - 1)
        alike = time.perf_counter()
        check = compare_cases(table, until=date(2026, 12, 1))
        compared = time.perf_counter()
        explorer_data(table, check)
        done = time.perf_counter()
        print(
            f"all as arrays {loaded - start:.2f} s, most like one {alike - loaded:.2f} s (aim 1)"
        )
        print(
            f"whole comparison {compared - alike:.2f} s, page data with neighbours {done - compared:.2f} s"
        )


if __name__ == "__main__":
    main()
