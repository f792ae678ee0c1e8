"""The knowledge file: read, validated with the line, hashed; every number with its spread."""

import hashlib
import math
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

from rca.base.errors import KnowledgeError
from rca.case.vocabulary import CAUSES, MECHANISMS
from rca.evidence.item import Node

INLET = "inlet pressure"
INLET_STATES = ("healthy", "low", "near vapour")
BINARY = ("no", "yes")
KINDS = ("cause", "condition", "mechanism", "sign")


@dataclass(frozen=True, slots=True, kw_only=True)
class Number:
    """A probability with low, best and high."""

    low: float
    best: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Variable:
    """One variable of the network and what brings it about."""

    name: str
    kind: str  # cause, condition, mechanism or sign
    leaves: Mapping[str, Number]
    anyway: Number | None
    given: Mapping[str, Number]  # by state of the inlet pressure
    needs: tuple[str, ...]
    gate: Mapping[str, Number]  # both, only_first, only_second, none
    explains_failure: Number | None
    worse: Number | None
    source: str
    flag: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PossibleTest:
    """A test somebody could still do."""

    name: str
    looks_at: str
    cost: float
    hours: float
    alters_evidence: bool
    perishes_days: float
    sensitivity: float
    specificity: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Change:
    """One number a site put in place of the shipped one, with its reason."""

    variable: str
    number: str
    before: float | None  # None where the arrow is new
    after: float
    reason: str
    place: str  # file and line


@dataclass(frozen=True, slots=True, kw_only=True)
class Knowledge:
    """All of the knowledge, with its version and hash."""

    version: str
    sha256: str
    variables: Mapping[str, Variable]
    failure: Number
    reliability: Mapping[str, float]
    tests: tuple[PossibleTest, ...]
    doubt: float  # chance that the network itself is wrong, so that its evidence says nothing
    changes: tuple[Change, ...] = ()  # of a site, over the shipped file

    @property
    def identity(self) -> str:
        """Version and hash; verdicts under different identities are never compared as equals."""
        return f"{self.version} sha256:{self.sha256[:16]}"

    def names(self, kind: str) -> tuple[str, ...]:
        """Names of the variables of one kind, in order of the file."""
        return tuple(n for n, v in self.variables.items() if v.kind == kind)


@cache
def shipped_knowledge() -> Knowledge:
    """The knowledge that ships with the program."""
    return parse_knowledge(
        files("rca.verdict").joinpath("knowledge.toml").read_text(encoding="utf-8")
    )


def parse_knowledge(text: str) -> Knowledge:
    """Knowledge from its text.

    Raises KnowledgeError with the line for a syntax error, an unknown name, a probability of 0 or
    1 or beyond, a missing mechanism or cause, or a cycle.
    """
    try:
        plain = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise KnowledgeError(f"the knowledge file is not TOML: {error}") from error
    reader = _Reader(text, plain)
    variables = reader.variables()
    _complete(variables)
    known_parents(variables, variables, reader)
    no_cycle(variables)
    tests = tuple(PossibleTest(**row) for row in plain.get("test", []))
    for test in tests:
        if test.looks_at not in variables:
            raise KnowledgeError(f"test {test.name!r} looks at the unknown {test.looks_at!r}")
    return Knowledge(
        version=str(plain["version"]),
        sha256=hashlib.sha256(text.encode()).hexdigest(),
        variables=variables,
        failure=reader.number("failure", plain["failure"], "anyway"),
        reliability=dict(plain["reliability"]),
        tests=tests,
        doubt=reader.number("doubt", plain["doubt"], "network").best,
    )


class _Reader:
    def __init__(self, text: str, plain: Mapping[str, Any]) -> None:
        self.lines = text.splitlines()
        self.plain = plain
        self.spread = plain.get("spread", {})

    def variables(self) -> dict[str, Variable]:
        """Every cause, condition, mechanism and sign."""
        return {
            name: self._variable(kind, name, table)
            for kind in KINDS
            for name, table in self.plain.get(kind, {}).items()
        }

    def _variable(self, kind: str, name: str, table: Mapping[str, Any]) -> Variable:
        flag = str(table.get("flag", "judgement"))

        def numbers(key: str) -> dict[str, Number]:
            return {k: self._parse(name, v, flag) for k, v in table.get(key, {}).items()}

        def optional(key: str) -> Number | None:
            return self.number(name, table, key) if key in table else None

        gates = ("both", "only_first", "only_second", "none")
        return Variable(
            name=name,
            kind=kind,
            leaves=numbers("leaves"),
            anyway=optional("prior") or optional("anyway"),
            given=numbers("given"),
            needs=tuple(table.get("needs", ())),
            gate={g: self.number(name, table, g) for g in gates if g in table},
            explains_failure=optional("explains_failure"),
            worse=optional("worse"),
            source=str(table.get("source", "judgement")),
            flag=flag,
        )

    def number(self, name: str, table: Mapping[str, Any], key: str) -> Number:
        """One probability of a table."""
        return self._parse(name, table[key], str(table.get("flag", "judgement")))

    def _parse(self, name: str, value: Any, flag: str) -> Number:
        return parse_number(value, self.place(name), float(self.spread.get(flag, 1.0)))

    def place(self, name: str) -> str:
        """A name with the line of its table."""
        for number, line in enumerate(self.lines, start=1):
            if f'"{name}"]' in line:
                return f"line {number}, {name}"
        return name


def parse_number(value: Any, place: str, half: float = 1.0) -> Number:
    """A probability, or low, best and high; ``half`` is the spread in log odds of a single one.

    Raises KnowledgeError with the place for 0, 1, what lies beyond, and what is no number.
    """
    if isinstance(value, list) and len(value) == 3:
        low, best, high = (_inside(place, v) for v in value)
        if not low <= best <= high:
            raise KnowledgeError(f"{place}: {value} is not low, best, high")
        return Number(low=low, best=best, high=high)
    best = _inside(place, value)
    centre = math.log(best / (1 - best))
    return Number(low=_expit(centre - half), best=best, high=_expit(centre + half))


def _inside(place: str, value: Any) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not 0.0 < value < 1.0:
        raise KnowledgeError(
            f"{place}: found {value!r}; expected a probability above 0 and "
            "below 1; nothing is impossible or certain in this trade, so write 0.001 or 0.999"
        )
    return float(value)


def _complete(variables: Mapping[str, Variable]) -> None:
    names = {n for n, v in variables.items() if v.kind == "mechanism"}
    if names != set(MECHANISMS):
        raise KnowledgeError(f"mechanisms differ: {sorted(names ^ set(MECHANISMS))}")
    causes = {n for n, v in variables.items() if v.kind == "cause"}
    if causes | {"unknown"} != set(CAUSES):
        raise KnowledgeError(f"causes differ: {sorted((causes | {'unknown'}) ^ set(CAUSES))}")
    missing = [node.value for node in Node if node.value not in variables]
    if missing:
        raise KnowledgeError(f"no numbers for the observable nodes {', '.join(missing)}")


def known_parents(
    some: Mapping[str, Variable], variables: Mapping[str, Variable], place: "_Reader | str"
) -> None:
    """Refuse parents nobody knows; signs are brought about and bring nothing about."""
    for variable in some.values():
        where = place if isinstance(place, str) else place.place(variable.name)
        for parent in (*variable.leaves, *variable.needs):
            if parent not in variables:
                raise KnowledgeError(f"{where}: unknown parent {parent!r}")
            if variables[parent].kind == "sign":
                raise KnowledgeError(f"{where}: the sign {parent!r} can't be a parent")


def no_cycle(variables: Mapping[str, Variable]) -> None:
    """Refuse a circle of causes."""
    done: set[str] = set()

    def visit(name: str, path: tuple[str, ...]) -> None:
        if name in path:
            raise KnowledgeError(f"a circle of causes: {' -> '.join((*path, name))}")
        if name in done:
            return
        for parent in (*variables[name].leaves, *variables[name].needs):
            visit(parent, (*path, name))
        done.add(name)

    for name in variables:
        visit(name, ())


def _expit(x: float) -> float:
    return 1.0 / (1.0 + math.exp(-x))
