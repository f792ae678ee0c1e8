"""One clause held against the records and the failures that came after the action."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta
from enum import StrEnum
from math import exp

import numpy as np
import numpy.typing as npt

from rca.actions.condition import Clause, Silence
from rca.case.series import AlignedRecord, FloatArray, Series

COVERAGE = 0.9  # share of the window that must hold samples; common practice, no source
LEAST_RUNNING = 0.1  # share of the window the pump must have run; own choice
RUNNING = 0.1  # share of the greatest recorded speed above which the pump counts as running
SILENCE = 0.05  # probability without improvement down to which silence counts
EXTREMES = ("min", "max")  # one moment refutes these; the others need the whole window

Convert = Callable[[str, str], float]  # (value with unit, quantity) -> SI
Mask = npt.NDArray[np.bool_]


class Proof(StrEnum):
    """What the records say of an action's condition."""

    PROVED = "proved"
    REFUTED = "refuted"
    NOT_YET = "not yet provable"
    UNCHECKABLE = "cannot be checked"


@dataclass(frozen=True, slots=True, kw_only=True)
class Failure:
    """One failure of the machine; ``words`` are its causes and mechanisms, () where unknown."""

    day: date
    words: tuple[str, ...] = ()
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Failures:
    """The failures of one machine known until a day; ``trigger`` set the actions off."""

    known: tuple[Failure, ...] = ()
    trigger: date | None = None
    until: date | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class ClauseOutcome:
    """One clause held against the records."""

    clause: str
    proof: Proof
    reason: str
    quantity: str = ""
    measured: float | None = None  # SI, of the clause's function over the window
    limit: float | None = None  # SI
    days_covered: float = 0.0
    days_needed: float | None = None
    running_hours: float | None = None
    silence_p: float | None = None  # of the silence so far if nothing changed


def measured_outcome(
    clause: Clause, done: date | None, record: AlignedRecord | None, limit: float
) -> ClauseOutcome:
    """A measured clause against the record; ``limit`` is its value in SI.

    A single moment refutes a "min" or "max"; a mean or a percentile is judged on its whole window.
    """
    needed = clause.hours / 24 if clause.hours is not None else None

    def answer(proof: Proof, reason: str, **more: float) -> ClauseOutcome:
        return ClauseOutcome(
            clause=clause.text,
            proof=proof,
            reason=reason,
            quantity=clause.quantity,
            limit=limit,
            days_needed=needed,
            measured=more.get("measured"),
            days_covered=more.get("covered", 0.0),
            running_hours=more.get("running"),
        )

    anchor = clause.anchor or done
    if anchor is None:
        return answer(Proof.NOT_YET, "the action has no done date yet")
    series = record.get(clause.quantity) if record is not None else None
    if record is None or series is None:
        return answer(Proof.NOT_YET, f"no usable record of {clause.quantity}")
    sampled = np.isfinite(series.mean)
    running = running_mask(record)
    window, full = _window(record, anchor, clause, running & sampled)
    used = window & running & sampled
    if not used.any():
        return answer(Proof.NOT_YET, f"no record of {clause.quantity} in service after {anchor}")
    measured = _measure(clause.function, series, used)
    hours = float(used.sum()) * record.bin_s / 3600.0
    covered = float((window & sampled).sum()) * record.bin_s / 86400.0
    told = {"measured": measured, "covered": covered, "running": hours}
    if clause.in_service:
        told["covered"] = hours / 24.0
    holds = _holds(measured, clause.comparison, limit)
    what = f"{clause.function}({clause.quantity})"
    if not holds and clause.function in EXTREMES:
        words = f"{what} does not keep {clause.comparison} {clause.value}"
        return answer(Proof.REFUTED, words, **told)
    short = _short(clause, hours, covered, full=full)
    if short:
        so_far = "holds so far" if holds else "does not hold so far"
        return answer(Proof.NOT_YET, f"{so_far}, but {short}", **told)
    if not holds:
        words = f"{what} does not keep {clause.comparison} {clause.value}"
        return answer(Proof.REFUTED, words, **told)
    return answer(Proof.PROVED, f"{clause.text} holds", **told)


def _short(clause: Clause, hours: float, covered: float, *, full: bool) -> str:
    """What is still missing of the window; empty where nothing is."""
    if clause.hours is None:
        return ""
    if clause.in_service:
        return "" if full else f"the pump ran {hours:.0f} of {clause.hours:g} h"
    needed = clause.hours / 24.0
    if covered < COVERAGE * needed:
        return f"the records cover {covered:.1f} of {needed:g} days"
    if hours < LEAST_RUNNING * clause.hours:
        return f"the pump ran only {hours:.0f} h in that time"
    return ""


def _window(
    record: AlignedRecord, anchor: date, clause: Clause, running: Mask
) -> tuple[Mask, bool]:
    """Bins of the clause's window, and whether the record reaches its end."""
    inside: Mask = record.time_s >= end_of(anchor)
    if clause.hours is None:
        return inside, True
    if not clause.in_service:
        end = end_of(anchor) + clause.hours * 3600.0
        reached = bool(record.time_s.size) and float(record.time_s[-1]) + record.bin_s >= end
        return inside & (record.time_s < end), reached
    served = np.cumsum(running & inside) * record.bin_s / 3600.0
    before = served - (running & inside) * record.bin_s / 3600.0
    full = bool(served.size) and float(served[-1]) >= clause.hours
    return inside & (before < clause.hours), full


def end_of(day: date) -> float:
    """The end of a day, UTC [s]: the day of the work itself proves nothing."""
    return datetime.combine(day, time.min, tzinfo=UTC).timestamp() + 86400.0


def running_mask(record: AlignedRecord) -> Mask:
    """Bins in which the shaft turned throughout; all of them without a record of its speed."""
    speed = record.get("shaft speed")
    if speed is None or not np.isfinite(speed.mean).any():
        return np.ones(record.time_s.shape, dtype=bool)
    return np.asarray(speed.low > RUNNING * float(np.nanmax(speed.mean)))


def _measure(function: str, series: Series, used: Mask) -> float:
    if function == "min":
        return float(np.nanmin(series.low[used]))
    if function == "max":
        return float(np.nanmax(series.high[used]))
    values: FloatArray = series.mean[used]
    if function == "mean":
        return float(np.nanmean(values))
    return float(np.nanquantile(values, {"median": 0.5, "p05": 0.05, "p95": 0.95}[function]))


def _holds(measured: float, comparison: str, limit: float) -> bool:
    return {
        ">=": measured >= limit,
        ">": measured > limit,
        "<=": measured <= limit,
        "<": measured < limit,
    }[comparison]


def silence_outcome(
    clause: Silence,
    cause: str,
    done: date | None,
    failures: Failures,
    record: AlignedRecord | None,
) -> ClauseOutcome:
    """A clause that asks for no recurrence, against the failures known and the time watched.

    A failure with no cause on record neither refutes nor counts as silence.
    """
    word = clause.word or cause
    watched: float | None = None
    old = _old_hours(clause, word, failures)
    needed = clause.hours if clause.hours is not None else old and old * clause.intervals

    def answer(proof: Proof, reason: str) -> ClauseOutcome:
        p = exp(-watched / old) if old and watched is not None else None
        return ClauseOutcome(
            clause=clause.text,
            proof=proof,
            reason=reason,
            days_covered=(watched or 0.0) / 24.0,
            days_needed=needed / 24.0 if needed else None,
            silence_p=p,
        )

    if not word:
        return answer(
            Proof.UNCHECKABLE, "neither the condition nor the action names a cause to watch for"
        )
    anchor = clause.anchor or done
    if anchor is None:
        return answer(Proof.NOT_YET, "the action has no done date yet")
    after = [f for f in failures.known if f.day > anchor]
    again = [f for f in after if word in f.words]
    if again:
        days = (again[0].day - anchor).days
        return answer(Proof.REFUTED, f"{word} came back on {again[0].day}, {days} d after")
    unknown = [f for f in after if not f.words]
    if unknown:
        return answer(
            Proof.NOT_YET, f"the failure of {unknown[0].day} has no cause on record; find it first"
        )
    watched = _watched_hours(clause, anchor, failures, record)
    return _silent(clause, watched, old, needed, anchor, answer)


def _silent(
    clause: Silence,
    watched: float,
    old: float | None,
    needed: float | None,
    anchor: date,
    answer: Callable[[Proof, str], ClauseOutcome],
) -> ClauseOutcome:
    if old is None or needed is None:
        return answer(
            Proof.NOT_YET,
            f"silent for {watched / 24:.0f} d, but no earlier interval says what that is worth; "
            "give one, e.g. 'against one in 90 d'",
        )
    if watched < needed:
        return answer(
            Proof.NOT_YET, f"silent for {watched / 24:.0f} of {needed / 24:.0f} d so far"
        )
    p = exp(-watched / old)
    # rounding in the count of days must not turn three intervals into slightly less
    if p > SILENCE * 1.01:
        more = -np.log(SILENCE) * old / 24.0
        until = anchor + timedelta(days=int(np.ceil(more)))
        return answer(
            Proof.NOT_YET,
            f"silent for the time asked, but with one in {old / 24:.0f} d before, such a silence "
            f"has probability {p:.2f} if nothing changed; watch until {until}",
        )
    kind = " in service" if clause.in_service else ""
    return answer(Proof.PROVED, f"silent for {watched / 24:.0f} d{kind}; by chance only {p:.2f}")


def _watched_hours(
    clause: Silence, anchor: date, failures: Failures, record: AlignedRecord | None
) -> float:
    if clause.in_service:
        if record is None:
            return 0.0
        inside = running_mask(record) & (record.time_s >= end_of(anchor))
        return float(inside.sum()) * record.bin_s / 3600.0
    if failures.until is None:
        return 0.0
    return max(float((failures.until - anchor).days), 0.0) * 24.0


def _old_hours(clause: Silence, word: str, failures: Failures) -> float | None:
    """The old interval: as given, else of earlier failures, without the one that set it off."""
    if clause.old_interval_hours is not None:
        return clause.old_interval_hours
    if clause.in_service or failures.trigger is None:
        return None  # the history counts days, not running hours
    before = sorted(f.day for f in failures.known if f.day < failures.trigger and word in f.words)
    if len(before) < 2:
        return None
    return (failures.trigger - before[0]).days / (len(before) - 1) * 24.0


def joined(outcomes: Sequence[ClauseOutcome]) -> tuple[Proof, str]:
    """All clauses together: one refuted refutes, all proved prove."""
    for proof in (Proof.REFUTED, Proof.UNCHECKABLE, Proof.NOT_YET):
        reasons = [o.reason for o in outcomes if o.proof is proof]
        if reasons:
            return proof, "; ".join(reasons)
    return Proof.PROVED, "; ".join(o.reason for o in outcomes)
