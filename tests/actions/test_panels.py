"""What the report says of actions: in field units, no word stronger than its number."""

from datetime import date

from rca.actions.effect import Effect, Match
from rca.actions.proof import Proof
from rca.actions.review import ActionsCheck
from rca.archive.codec import from_plain, to_plain
from rca.figures.actions import FIGURE, figures_actions
from rca.figures.panels_actions import panels_actions
from rca.suction.spread import Spread
from tests.actions.test_proof import MIN, follow_up, review

GAIN = Spread(mean=0.22e5, sd=0.02e5, p05=0.19e5, p50=0.22e5, p95=0.25e5)


def check(**effect: object) -> ActionsCheck:
    found = review(MIN, follow_up(31))
    given = {
        "action": "A1",
        "cause": "suction strainer clogged",
        "change": "clean strainer",
        "match": Match.AS_PREDICTED,
        "reason": "the measured gain lies in the predicted range",
        "predicted_gain": GAIN,
        "predicted_after": GAIN,
        "before": 0.72e5,
        "after": 0.93e5,
        "gain": 0.21e5,
        "hours_after": 300.0,
    }
    return ActionsCheck(
        as_of=date(2026, 5, 1), actions=(found,), effects=(Effect(**(given | effect)),)
    )


def test_the_page_shows_measured_values_in_field_units() -> None:
    section = panels_actions(check())
    register, effect = section.panels
    assert register.answer == "1 action, 1 proved, as of 2026-05-01."
    assert register.tables[1].rows[0][2] == "0.90 bar(a) in 720 h of running"
    assert "A1 gave 0.21 bar, 0.19 to 0.25 bar were predicted: as predicted" in effect.answer
    assert effect.figures[0].name == FIGURE
    assert FIGURE in figures_actions(check())
    assert all("authorises nothing" in p.limits[-1] for p in section.panels)


def test_what_is_not_measured_is_not_drawn() -> None:
    found = check(
        match=Match.NOT_MEASURED,
        reason="0 h",
        gain=None,
        before=None,
        after=None,
        predicted_gain=None,
    )
    _, effect = panels_actions(found).panels
    assert effect.figures == ()
    assert figures_actions(found) == {}
    assert "Not one fix" in effect.answer


def test_without_actions_the_section_says_so() -> None:
    (register,) = panels_actions(ActionsCheck(as_of=None)).panels
    assert register.answer == "No action is on record."


def test_the_check_comes_back_from_the_store() -> None:
    found = check()
    assert from_plain(ActionsCheck, to_plain(found)) == found
    assert found.actions[0].proof is Proof.PROVED
