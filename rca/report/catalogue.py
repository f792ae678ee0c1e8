"""Words of the page in the reader's language: one catalogue, English as the key.

The frame of the report (headings, labels, fixed sentences) is complete in every language; words
that come out of the checks are translated where the catalogue holds them exactly and stay English
elsewhere. Text of the evidence is never translated.
"""

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date, datetime
from functools import cache
from importlib.resources import files

from babel import Locale
from babel.dates import format_date

from rca.base.errors import RenderError

LANGUAGES = ("en", "de")
_DECIMAL = re.compile(r"(?<![\w.,-])(-|\u2212)?(\d+)\.(\d+)(?![\w.]*\.\d|\d|-\d)")


@dataclass(frozen=True, slots=True)
class Reader:
    """The reader's language."""

    language: str
    words: Mapping[str, str]

    def frame(self, text: str) -> str:
        """A text of the frame.

        Raises RenderError where the catalogue does not hold it.
        """
        if self.language == "en" or not text:
            return text
        if text not in self.words:
            raise RenderError(f"the catalogue has no {self.language} for {text!r}")
        return self.words[text]

    def word(self, text: str) -> str:
        """A word out of a check: translated where the catalogue holds it, else as it is."""
        return self.words.get(text, text)

    def number(self, text: str) -> str:
        """Decimal points of a computed text in the reader's manner; dates and ids untouched."""
        if self.language == "en":
            return text
        return _DECIMAL.sub(lambda m: f"{m[1] or ''}{m[2]},{m[3]}", text)

    def said(self, text: str) -> str:
        """A text out of a check: the catalogue's words, else English with the reader's numbers."""
        return self.words[text] if text in self.words else self.number(text)

    def day(self, day: date | None) -> str:
        """A day in the reader's manner; ISO in English, where it can't be misread."""
        if day is None:
            return self.frame("not recorded")
        if self.language == "en":
            return day.isoformat()[:10]
        return str(format_date(day, "dd.MM.yyyy", locale=Locale(self.language)))

    def moment(self, moment: datetime | None) -> str:
        """A moment with its zone."""
        if moment is None:
            return self.frame("not recorded")
        zone = moment.strftime("%z")
        shown = f"UTC{zone[:3]}:{zone[3:]}" if zone else self.frame("zone not stated")
        return f"{self.day(moment)} {moment:%H:%M} {shown}"


@cache
def reader(language: str) -> Reader:
    """The reader of a language.

    Raises RenderError for a language the catalogue does not have.
    """
    if language not in LANGUAGES:
        raise RenderError(f"no texts in {language!r}; there are {', '.join(LANGUAGES)}")
    if language == "en":
        return Reader(language, {})
    text = files("rca.report").joinpath(f"catalogue_{language}.toml").read_text(encoding="utf-8")
    return Reader(language, tomllib.loads(text)["words"])
