"""Line numbers of the keys of a TOML document, for messages; the values come from ``tomllib``."""

import re

_TABLE = re.compile(r"\s*\[(?!\[)\s*([^\]]+?)\s*\]")
_ARRAY = re.compile(r"\s*\[\[\s*([^\]]+?)\s*\]\]")
_KEY = re.compile(r"\s*([A-Za-z0-9_\-.\"' ]+?)\s*=")


def key_lines(text: str) -> dict[str, int]:
    """Dotted path of each key and table to its line, counted from 1.

    Elements of an array of tables are ``name[0]``, ``name[1]`` ...; keys inside inline tables and
    multi-line values have the line of the key that opens them.
    """
    lines: dict[str, int] = {}
    counts: dict[str, int] = {}
    prefix = ""
    for number, line in enumerate(text.splitlines(), start=1):
        if match := _ARRAY.match(line):
            name = _plain(match[1])
            counts[name] = counts.get(name, -1) + 1
            prefix = f"{name}[{counts[name]}]"
            lines.setdefault(name, number)
            lines[prefix] = number
        elif match := _TABLE.match(line):
            prefix = _plain(match[1])
            lines.setdefault(prefix, number)
        elif (match := _KEY.match(line)) and not line.lstrip().startswith("#"):
            name = _plain(match[1])
            lines.setdefault(f"{prefix}.{name}" if prefix else name, number)
    return lines


def _plain(name: str) -> str:
    return ".".join(part.strip().strip("\"'") for part in name.split("."))
