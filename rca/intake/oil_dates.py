"""Days as laboratories write them; a day that may be two is refused, not guessed."""

import re
from collections.abc import Sequence
from datetime import date, timedelta

from rca.intake.oil_cells import plain_text
from rca.intake.oil_properties import fold

_MONTHS = {
    word: number
    for number, words in enumerate(
        (
            "jan january januar janvier janv janner",
            "feb february februar fevrier fevr feber",
            "mar march marz mars maerz mrz",
            "apr april avril avr",
            "may mai",
            "jun june juni juin",
            "jul july juli juillet juil",
            "aug august aout",
            "sep sept september septembre",
            "oct okt october oktober octobre",
            "nov november novembre",
            "dec dez december dezember decembre",
        ),
        start=1,
    )
    for word in words.split()
}
_SERIAL = re.compile(r"[34]\d{4}(?:\.0+)?")
_TRIPLE = re.compile(r"(\d{1,4})([./-])(\d{1,2})\2(\d{1,4})")


def day_first_of(texts: Sequence[str]) -> bool | None:
    """Whether a column of dates puts the day first, where one of its cells shows it."""
    seen = set()
    for text in texts:
        match = _TRIPLE.fullmatch(plain_text(text).split(" ")[0].split("T")[0])
        if match is None or len(match[1]) > 2 or match[2] == ".":
            continue
        first, second = int(match[1]), int(match[3])
        if first > 12 >= second:
            seen.add(True)
        elif second > 12 >= first:
            seen.add(False)
    return seen.pop() if len(seen) == 1 else None


def parse_day(text: str, *, day_first: bool | None) -> date | str:
    """The day of a cell; or the reason why it can't be told.

    ``day_first`` settles 03/04/2025, which is refused where it is None. A spreadsheet serial is
    read on the 1900 system.
    """
    plain = plain_text(text)
    if _SERIAL.fullmatch(plain):
        return date(1899, 12, 30) + timedelta(days=int(float(plain)))
    plain = re.split(r"[T ]\d{1,2}:\d", plain)[0].strip()
    if re.fullmatch(r"\d{4}-?W\d{1,2}", plain):
        return "a week, not a day"
    match = _TRIPLE.fullmatch(plain)
    if match is not None:
        return _numbers(match[1], match[2], match[3], match[4], day_first)
    parts = fold(plain).split()
    months = [_MONTHS[p] for p in parts if p in _MONTHS]
    numbers = [p for p in parts if p.isdigit()]
    if len(months) == 1 and len(numbers) == 2:
        first, second = numbers
        day, year = (second, first) if len(first) == 4 else (first, second)
        return _date(_year(year), months[0], int(day))
    return "not a date"


def _numbers(a: str, mark: str, b: str, c: str, day_first: bool | None) -> date | str:
    if len(a) == 4:
        return _date(int(a), int(b), int(c))
    first, second, year = int(a), int(b), _year(c)
    if len(c) == 2 and mark == "/" and day_first is None:
        return "two-digit numbers whose order can't be told; say day_first under [[oil_reports]]"
    if mark == ".":
        return _date(year, second, first)  # with full stops the day stands first
    if first > 12 or day_first is True:
        return _date(year, second, first)
    if second > 12 or day_first is False:
        return _date(year, first, second)
    if first == second:
        return _date(year, first, second)
    return "may be day or month first; say day_first = true or false under [[oil_reports]]"


def _year(text: str) -> int:
    number = int(text)
    return 2000 + number if len(text) == 2 else number


def _date(year: int, month: int, day: int) -> date | str:
    try:
        found = date(year, month, day)
    except ValueError:
        return "no such day"
    return found if 1970 <= year <= 2100 else "a year that can't be meant"
