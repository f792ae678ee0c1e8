"""What a rerun gave: a class for each quantity and for the run, and the reasons."""

from dataclasses import dataclass
from enum import IntEnum

from rca.archive.integrity import Breach


class RunClass(IntEnum):
    """How far a rerun agrees with what was issued; the run's class is the worst of its parts."""

    IDENTICAL = 0
    SAME_CONTENT = 1
    WITHIN = 2
    OUTSIDE = 3
    BAND = 4
    VERDICT = 5
    NOT_COMPARABLE = 6
    NOT_RUNNABLE = 7


WORDS = {
    RunClass.IDENTICAL: "identical",
    RunClass.SAME_CONTENT: "same content, pages differ",
    RunClass.WITHIN: "within tolerance",
    RunClass.OUTSIDE: "outside tolerance, same verdict",
    RunClass.BAND: "a band, flag or ranking changed",
    RunClass.VERDICT: "the verdict changed",
    RunClass.NOT_COMPARABLE: "not comparable",
    RunClass.NOT_RUNNABLE: "not runnable",
}
MEANING = {
    RunClass.IDENTICAL: "Nothing moved.",
    RunClass.SAME_CONTENT: "The numbers are the same; only the layout of the pages moved.",
    RunClass.WITHIN: "Numbers moved by less than their tolerances.",
    RunClass.OUTSIDE: "Numbers moved by more than their tolerances; the verdict stands. Each "
    "difference needs an explanation.",
    RunClass.BAND: "A word, a limit flag or a ranking changed. Somebody must review it.",
    RunClass.VERDICT: "The answer is another one. Stop using the report and issue it again.",
    RunClass.NOT_COMPARABLE: "Evidence, knowledge or form of the results differ, so this is no "
    "rerun of the same thing; what differs is listed.",
    RunClass.NOT_RUNNABLE: "The run could not be repeated. That is a finding of its own.",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Difference:
    """One quantity that is not the same."""

    quantity: str
    issued: str | float | bool | None
    recomputed: str | float | bool | None
    run_class: RunClass
    rule: str = ""  # the tolerance's name
    tolerance: float | None = None
    ratio: float | None = None  # distance over tolerance
    reason: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reason:
    """Something other than chance that may have moved a number."""

    kind: str  # "input", "knowledge", "code", "notebook", "parameters", "library", "machine", ...
    details: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Margin:
    """How far the answer for one side moved, and how far it is from its threshold."""

    side: str
    issued: float  # probability
    recomputed: float
    moved_log10_odds: float
    threshold: float
    distance_log10_odds: float  # of the recomputed value; negative below the threshold


@dataclass(frozen=True, slots=True, kw_only=True)
class FileCompared:
    """One file of the report against the recomputed one."""

    name: str
    same: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class RerunCheck:
    """Everything the rerun found."""

    source: str
    case_id: str
    title: str
    run_class: RunClass
    answer: str
    failure: str = ""  # why it could not be run
    breaches: tuple[Breach, ...] = ()
    signature: str = ""
    reasons: tuple[Reason, ...] = ()
    counts: dict[str, int] | None = None  # of quantities, by class
    differences: tuple[Difference, ...] = ()
    margins: tuple[Margin, ...] = ()
    near_edges: tuple[str, ...] = ()
    files: tuple[FileCompared, ...] = ()
    issued_sha256: str = ""  # of results.json
    recomputed_sha256: str = ""

    @property
    def agrees(self) -> bool:
        """Nothing differs beyond its tolerance, and everything is as it was issued."""
        return self.run_class <= RunClass.WITHIN and not self.breaches

    @property
    def runnable(self) -> bool:
        """A run was made."""
        return self.run_class is not RunClass.NOT_RUNNABLE
