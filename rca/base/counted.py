"""Counts in words."""


def counted(n: int, one: str, more: str = "") -> str:
    """A count with its noun, in the plural where it is not one."""
    return f"{n} {one}" if n == 1 else f"{n} {more or one + 's'}"
