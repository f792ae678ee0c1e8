"""The decision rules that turn probabilities into a side."""

from collections.abc import Mapping

HELD = 0.75  # a side is held at or above this probability
OPEN = 0.60  # and the other is left out below this
CLEAR = 0.40  # below this a side counts as not involved
OTHER = 0.50  # another mechanism this probable, or ...
NEITHER = 0.70  # ... neither side this probable, makes "neither"
LEAST_GROUPS = 2  # groups of evidence that must speak before a side is held


def side_of(
    sides: Mapping[str, float], others: Mapping[str, float], groups: int
) -> tuple[str, str]:
    """The side and the rule that gave it, in words.

    ``others`` are the mechanisms of neither side; ``groups`` counts groups of evidence with items.
    """
    s, d = sides["suction"], sides["discharge"]
    if groups < LEAST_GROUPS:
        return "undetermined", (
            f"fewer than {LEAST_GROUPS} groups of evidence speak; no side is held on one look"
        )
    if max(s, d) >= HELD and min(s, d) >= OPEN:
        return "both", (f"one side is at {HELD:.2f} or above and the other at {OPEN:.2f} or above")
    if s >= HELD:
        return "suction", f"suction is at {HELD:.2f} or above, discharge below {OPEN:.2f}"
    if d >= HELD:
        return "discharge", f"discharge is at {HELD:.2f} or above, suction below {OPEN:.2f}"
    strongest = max(others.values(), default=0.0)
    if max(s, d) < CLEAR and (strongest >= OTHER or sides["neither"] >= NEITHER):
        return "neither", (
            f"both sides are below {CLEAR:.2f} and another mechanism is at {OTHER:.2f} or above, "
            f"or neither side at {NEITHER:.2f}"
        )
    return "undetermined", (
        f"no side reaches {HELD:.2f}, and the sides are not both below {CLEAR:.2f}"
    )
