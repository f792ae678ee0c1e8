"""What the verdict stage stores."""

from dataclasses import dataclass, field

from rca.base.source import Source
from rca.verdict.knowledge import Change
from rca.verdict.order import Order
from rca.verdict.without import Without


@dataclass(frozen=True, slots=True, kw_only=True)
class WeighedItem:
    """One item with its weight in this case."""

    id: str  # E01, E02 ...
    key: str
    node: str
    statement: str
    source: Source
    more_sources: tuple[Source, ...]
    group: str
    common_cause: str
    basis: str
    absent: bool
    likelihood_ratio: float  # of what it favours, given everything else
    favours: str  # "suction", "not suction", a mechanism, "not ..." or "neither way"
    words: str  # the verbal scale
    suction_ratio: float  # Bayes factor for the suction side, given everything else
    discharge_ratio: float
    by_mechanism: dict[str, float]
    suction_alone: float = 1.0  # Bayes factor were this the only item
    discharge_alone: float = 1.0
    likelihood: dict[str, float] = field(default_factory=dict)  # of the finding, by state


@dataclass(frozen=True, slots=True, kw_only=True)
class RankedCause:
    """One root cause."""

    cause: str
    probability: float
    evidence: tuple[str, ...]  # ids for it
    against: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupWeight:
    """All items of a group together."""

    group: str
    items: tuple[str, ...]
    suction_ratio: float
    discharge_ratio: float
    capped: str = ""  # in words, where a ratio is beyond what judgement may claim


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """The sides with this group and all before it; the first step has no group."""

    group: str
    suction: float
    discharge: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Link:
    """One arrow of the network between causes, conditions and mechanisms."""

    parent: str
    child: str
    strength: float  # how often the parent brings the child about


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """A probability over the draws of the knowledge's numbers."""

    best: float
    p05: float
    p95: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Robustness:
    """How far the verdict depends on single items and on the numbers."""

    draws: int
    same_side: float  # share of draws with the same side
    suction: Band
    discharge: Band
    flip_set: tuple[str, ...]  # smallest set found whose removal changes the side
    prior_at_flip: dict[str, float]  # prior odds factor at which the side's threshold is met
    second_method: str
    second_agrees: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class NextTest:
    """A test not yet done, with what it would tell."""

    name: str
    looks_at: str
    information_bit: float
    cost: float
    hours: float
    alters_evidence: bool
    perishes_days: float
    if_found: dict[str, float]  # suction, discharge
    if_absent: dict[str, float]
    could_change_side: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Words:
    """The argument in words; no word stronger than its number."""

    finding: str
    strength: str
    supports: tuple[str, ...]
    against: tuple[str, ...]
    biggest_doubt: str
    rule: str  # the decision rule that gave the side
    caps: str = ""  # where judgement is held back, and by how much
    together: str = ""  # what all items do together, and how strong the strongest is


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """Side, mechanisms and what would change them."""

    side: str
    sides: dict[str, float]
    mechanisms: dict[str, float]
    prior: dict[str, float]
    conditions: dict[str, dict[str, float]]
    groups: tuple[GroupWeight, ...]
    robustness: Robustness
    next_tests: tuple[NextTest, ...]
    sensitivity: tuple[dict[str, str | float], ...]  # leave-one-out
    words: Words
    contradictions: tuple[str, ...] = ()
    order: Order | None = None  # which side showed first; asked where both took part
    without: tuple[Without, ...] = ()  # one cause taken away
    running: tuple[Step, ...] = ()  # group after group, in the order of the groups
    links: tuple[Link, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class VerdictCheck:
    """Everything the verdict notebook stores."""

    verdict: Verdict
    causes: tuple[RankedCause, ...]
    evidence: tuple[WeighedItem, ...]
    knowledge: str
    changes: tuple[Change, ...] = ()  # numbers a site put in place of the shipped ones
