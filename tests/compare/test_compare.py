"""The comparison against planted truths, exact identities and sums worked by hand."""

from datetime import date, timedelta
from math import exp, log2

import numpy as np
import pytest

from rca.base.errors import ArchiveError
from rca.compare.check import compare_cases
from rca.compare.cost import read_cost
from rca.compare.exposure import Watch, read_exposure, watches
from rca.compare.incident import read_incident
from rca.compare.open_actions import Standing
from rca.compare.outcomes import Result
from rca.compare.pareto import ordered, rank
from rca.compare.similar import DOUBT, most_like, neighbours
from rca.compare.table import IncidentTable, table_of
from tests.compare.made import action, many, results

UNTIL = date(2026, 12, 1)


def table(*plain: dict) -> IncidentTable:
    return table_of(tuple(read_incident(p, source=f"{k}") for k, p in enumerate(plain)))


@pytest.mark.parametrize(
    ("text", "amount", "currency"),
    [
        ("EUR 38 400, estimate: pump, oil", 38400.0, "EUR"),
        ("€12.500", 12500.0, "EUR"),
        ("USD 1,234,567.50", 1234567.5, "USD"),
        ("12.5 k EUR", 12500.0, "EUR"),
        ("3000 GBP", 3000.0, "GBP"),
    ],
)
def test_a_cost_as_people_write_it(text: str, amount: float, currency: str) -> None:
    found = read_cost(text)
    assert found is not None
    assert (found.amount, found.currency) == (amount, currency)


@pytest.mark.parametrize("text", ["", "not known", "38400", "a lot of EUR"])
def test_a_cost_that_says_no_amount_is_not_guessed(text: str) -> None:
    assert read_cost(text) is None


@pytest.mark.outside_value(source="sums worked by hand")
def test_rankings_by_count_downtime_and_cost() -> None:
    t = table(
        results("1", downtime_h=10, cost="EUR 100"),
        results("2", downtime_h=None, cost="USD 50"),
        results("3", cause="dirt ingress", downtime_h=90, cost="EUR 900"),
    )
    found = rank(t, "cause")
    by = {b.name: b for b in found.bars}
    one = by["suction strainer clogged"]
    assert (one.count, one.downtime_h, one.downtime_known) == (2, 10.0, 1)
    assert one.cost == {"EUR": 100.0, "USD": 50.0}
    assert next(b.name for b in ordered(found, "count")) == "suction strainer clogged"
    assert next(b.name for b in ordered(found, "downtime")) == "dirt ingress"
    assert [b.name for b in ordered(found, "cost", "USD")] == ["suction strainer clogged"]
    assert one.expected == pytest.approx(0.85 + 0.85 + 0.05)


@pytest.mark.outside_value(source="bits worked by hand from the shares")
def test_likeness_is_the_stated_sum() -> None:
    t = table(results("1"), results("2"), results("3", cause="dirt ingress"))
    first, last = most_like(t, 0)
    assert t.ids[first.other] == "2"
    # of three cases: strainer, pitting, noise seen in two of two or three lookers and so on
    seen = {
        "strainer found clogged": (2, 2),
        "pitting on inlet-side zones": (2, 2),
        "steady whine or gravel noise": (2, 2),
    }
    absent = {"air leak found on the suction side": (2, 2), "spark marks": (2, 2)}
    bits = sum(log2((n + 2) / (k + 1)) for k, n in [*seen.values(), *absent.values()])
    agreed = bits + 3.0  # pump kind, fluid class and pressure agree, one bit each
    assert first.agreed == pytest.approx(agreed, rel=1e-5)
    assert first.score == pytest.approx(agreed / (agreed + DOUBT), rel=1e-5)
    assert last.score < first.score
    assert not first.different
    nearest, scores = neighbours(t, count=2)
    assert nearest[0].tolist() == [1, 2]
    assert scores[0, 0] == pytest.approx(first.score)


def test_what_nobody_looked_at_does_not_count() -> None:
    bare = results("2")
    bare["evidence"], bare["case"]["machine"] = [], {}
    t = table(results("1"), bare)
    check = compare_cases(t, until=UNTIL, like="1")
    assert check.alike == ()
    assert check.not_comparable == 1
    assert t.ids[check.same_finding[0][0]] == "2"


def test_the_planted_cause_is_found_again_among_many() -> None:
    t = table(*many(400, machines=40))
    row = len(t) - 1
    for one in most_like(t, row):
        assert t.main_causes[one.other] == t.main_causes[row]


@pytest.mark.outside_value(source="incidents drawn from a power law with exponent 0.7")
def test_growth_of_the_fleet_is_found() -> None:
    t = table(*many(400, machines=40))
    given = [
        Watch(
            machine=m,
            start=(date(2017, 12, 31) - date(1970, 1, 1)).days,
            end=(date(2025, 12, 31) - date(1970, 1, 1)).days,
        )
        for m in sorted(set(t.machines))
    ]
    fleet = compare_cases(t, until=date(2025, 12, 31), given=given).recurrences[0]
    assert fleet.events == 400
    assert fleet.growth is not None
    assert fleet.growth.exponent_unbiased == pytest.approx(0.7, abs=0.09)
    assert fleet.chosen is not None
    assert fleet.chosen.improving
    assert fleet.corrected_p < 0.05


def test_the_incident_that_starts_a_watch_is_not_counted() -> None:
    t = table(results("1", day=date(2020, 1, 1)), results("2", day=date(2021, 1, 1)))
    found = watches(t, (), until=date(2022, 1, 1))
    assert found[0].days == 731
    fleet = compare_cases(t, until=date(2022, 1, 1)).recurrences[0]
    assert (fleet.seen, fleet.events) == (2, 1)
    assert fleet.ages == (366.0,)


def test_machines_of_one_name_on_two_sites_are_two() -> None:
    t = table(results("1", site="north"), results("2", site="south"))
    assert t.machines == ("P-1, north", "P-1, south")
    assert compare_cases(t, until=UNTIL).came_back == ()


def follow_up(*, again: bool, watched: int) -> Result:
    start = date(2020, 1, 1)
    plain = [results(str(k), day=start + timedelta(days=100 * k)) for k in range(4)]
    done = start + timedelta(days=310)
    plain[3]["actions"] = [action(1, due=done, done=done)]
    if again:
        plain.append(results("9", day=done + timedelta(days=50)))
    check = compare_cases(table(*plain), until=done + timedelta(days=watched))
    (kind,) = check.outcomes
    (one,) = kind.actions
    if not again:
        assert one.old_interval_days == pytest.approx(150.0)  # two counted in the 300 days before
        assert one.silence_p == pytest.approx(exp(-watched / 150.0))
    return one.result


@pytest.mark.outside_value(source="silence of t over an interval T has exp(-t/T)")
def test_silence_counts_from_three_old_intervals() -> None:
    assert follow_up(again=False, watched=449) is Result.TOO_SOON
    assert follow_up(again=False, watched=451) is Result.HELD
    assert follow_up(again=True, watched=900) is Result.CAME_BACK


def test_an_action_without_an_earlier_interval_has_no_measure() -> None:
    one = results("1", day=date(2020, 1, 1), actions=(action(1, due=None, done=date(2020, 1, 9)),))
    (kind,) = compare_cases(table(one), until=UNTIL).outcomes
    assert kind.actions[0].result is Result.NO_MEASURE


def test_knowledge_versions_stay_apart() -> None:
    t = table(*(results(str(k), knowledge=f"v{k % 2}") for k in range(6)))
    check = compare_cases(t, until=UNTIL)
    assert [len(g.cases) for g in check.groups] == [3, 3]
    for group in check.groups:
        assert group.rankings[0].n == 3


def test_actions_on_a_day() -> None:
    t = table(
        results(
            "1",
            actions=(
                action(1, due=date(2026, 11, 1)),
                action(2, due=date(2026, 12, 5)),
                action(3, due=date(2027, 6, 1)),
                action(4, due=None, done=date(2026, 1, 1), proof="refuted"),
                action(5, due=None, done=date(2026, 1, 1), proof="proved"),
                action(6, due=date(2026, 1, 1), status="rejected"),
            ),
        )
    )
    found = compare_cases(t, until=UNTIL).register
    assert [(r.action.id, r.standing) for r in found.rows] == [
        ("A4", Standing.REFUTED),
        ("A1", Standing.OVERDUE),
        ("A2", Standing.DUE),
        ("A3", Standing.OPEN),
        ("A5", Standing.PROVED),
        ("A6", Standing.ENDED),
    ]
    assert found.bad


def test_an_unknown_case_to_compare_with_is_named() -> None:
    with pytest.raises(ArchiveError, match="no case 'X-1'"):
        compare_cases(table(results("1")), until=UNTIL, like="X-1")


@pytest.mark.parametrize(
    ("row", "words"),
    [
        ("P-1,yesterday,2024-01-01,", "line 2, from"),
        ("P-1,2024-01-01,2023-01-01,", "does not come after"),
        ("P-1,2023-01-01,2024-01-01,many", "expected hours"),
        ("P-1,2023-01-01,2024-01-01,99999", "at most"),
    ],
)
def test_a_broken_exposure_row_is_answered(tmp_path, row: str, words: str) -> None:
    path = tmp_path / "exposure.csv"
    path.write_text(f"asset,from,to,running_hours\n{row}\n")
    with pytest.raises(ArchiveError, match=words):
        read_exposure(path)


def test_running_hours_are_the_exposure_where_all_have_them(tmp_path) -> None:
    path = tmp_path / "exposure.csv"
    path.write_text("asset,from,to,running_hours\nP-1,2024-01-01,2025-01-01,4000\n")
    t = table(results("1", day=date(2024, 7, 2)))
    fleet = compare_cases(t, until=UNTIL, given=read_exposure(path)).recurrences[0]
    assert fleet.unit == "running hours"
    assert fleet.exposure == 4000
    assert fleet.ages[0] == pytest.approx(4000 * 183 / 366)


def test_no_array_of_the_table_is_left_behind_by_rows() -> None:
    t = table(*many(30))
    some = t.rows(np.array([k % 3 == 0 for k in range(30)]))
    assert len(some) == 10
    for name in t.__dataclass_fields__:
        if name != "actions" and not name.endswith("names"):
            assert len(getattr(some, name)) == 10, name
