"""Why a number moved: evidence, knowledge, code, libraries, machine, or none of them."""

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from rca.archive.integrity import Breach
from rca.rerun.model import Reason

LAYOUT = frozenset({"jinja2", "matplotlib", "nbconvert", "papermill", "weasyprint", "rca"})
NUMERICS = "numerics"
AFTER_ISSUE = "results changed after issue"
MOVES_NUMBERS = (AFTER_ISSUE, "input", "knowledge", "code", "notebook", "parameters", "library")
MOST_NAMED = 12


def reasons(
    issued: Mapping[str, Any],
    now: Mapping[str, Any],
    breaches: Sequence[Breach],
) -> tuple[Reason, ...]:
    """What differs between two runs; ``issued`` and ``now`` are records, whole or stable part."""
    found = [
        Reason(kind=AFTER_ISSUE, details=("results.json",))
        if any(b.area == "results" and b.kind == "changed" for b in breaches)
        else None,
        _mapped("input", issued, now, "inputs"),
        _knowledge(issued, now),
        _code(issued, now),
        _mapped("notebook", issued, now, "notebooks"),
        _parameters(issued, now),
        *_libraries(issued, now),
        _machine(issued, now),
    ]
    return tuple(one for one in found if one is not None)


def reason_words(found: Iterable[Reason]) -> str:
    """The reason for one number that moved, in words; several can't be told apart by one rerun."""
    kinds = [one.kind for one in found if one.kind in MOVES_NUMBERS]
    if AFTER_ISSUE in kinds and len(kinds) == 1:
        return AFTER_ISSUE
    if not kinds and any(one.kind == "machine" for one in found):
        return f"{NUMERICS} (another machine)"
    return " or ".join(kinds) if kinds else NUMERICS


def _mapped(
    kind: str, issued: Mapping[str, Any], now: Mapping[str, Any], key: str
) -> Reason | None:
    before, after = issued.get(key), now.get(key)
    if not isinstance(before, Mapping) or not isinstance(after, Mapping):
        return None
    return _named(kind, _differing(before, after))


def _knowledge(issued: Mapping[str, Any], now: Mapping[str, Any]) -> Reason | None:
    details = []
    if issued.get("knowledge") != now.get("knowledge"):
        details.append(f"{issued.get('knowledge')} became {now.get('knowledge')}")
    before, after = issued.get("knowledge_files"), now.get("knowledge_files")
    if isinstance(before, Mapping) and isinstance(after, Mapping):
        details += _differing(before, after)
    return _named("knowledge", details)


def _code(issued: Mapping[str, Any], now: Mapping[str, Any]) -> Reason | None:
    if issued.get("code") == now.get("code"):
        return None
    before, after = issued.get("code_files"), now.get("code_files")
    if isinstance(before, Mapping) and isinstance(after, Mapping):
        changed = [
            name for name in _differing(before, after) if name.split(":")[0].endswith(".py")
        ]
        if changed:
            return _named("code", changed)
    return Reason(kind="code", details=("another version of the program's code",))


def _parameters(issued: Mapping[str, Any], now: Mapping[str, Any]) -> Reason | None:
    details = []
    if issued.get("seed") != now.get("seed"):
        details.append(f"seed {issued.get('seed')} became {now.get('seed')}")
    before, after = issued.get("parameters"), now.get("parameters")
    if isinstance(before, Mapping) and isinstance(after, Mapping):
        details += [
            f"{stage}: {before.get(stage)} became {after.get(stage)}"
            for stage in sorted({*before, *after})
            if before.get(stage) != after.get(stage)
        ]
    return _named("parameters", details)


def _libraries(issued: Mapping[str, Any], now: Mapping[str, Any]) -> list[Reason | None]:
    before, after = issued.get("versions", {}), now.get("versions", {})
    changed = [
        (name, f"{name} {before.get(name, 'none')} became {after.get(name, 'none')}")
        for name in sorted({*before, *after})
        if before.get(name) != after.get(name)
    ]
    return [
        _named("library", [words for name, words in changed if name not in LAYOUT]),
        _named("layout library", [words for name, words in changed if name in LAYOUT]),
    ]


def _machine(issued: Mapping[str, Any], now: Mapping[str, Any]) -> Reason | None:
    before, after = issued.get("environment"), now.get("environment")
    if not isinstance(before, Mapping) or not isinstance(after, Mapping):
        return None
    keys = ("system", "libc", "processor", "processor_features", "blas", "text_shaping", "fonts")
    return _named("machine", [key for key in keys if before.get(key) != after.get(key)])


def _differing(before: Mapping[str, Any], after: Mapping[str, Any]) -> list[str]:
    found = []
    for name in sorted({*before, *after}):
        if name not in after:
            found.append(f"{name}: missing")
        elif name not in before:
            found.append(f"{name}: new")
        elif before[name] != after[name]:
            found.append(
                f"{name}: expected {str(before[name])[:16]}, found {str(after[name])[:16]}"
            )
    return found


def _named(kind: str, details: Sequence[str]) -> Reason | None:
    if not details:
        return None
    told = tuple(details[:MOST_NAMED])
    if len(details) > MOST_NAMED:
        told = (*told, f"and {len(details) - MOST_NAMED} more")
    return Reason(kind=kind, details=told)
