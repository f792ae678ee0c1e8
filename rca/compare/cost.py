"""A cost as people state it: "EUR 38 400, estimate: pump, oil, lost production"."""

import re
from dataclasses import dataclass

_SIGNS = {"€": "EUR", "$": "USD", "£": "GBP"}
_AMOUNT = r"(?P<amount>\d{1,3}(?:[ ' \u2009\u202f.,]\d{3})+(?:[.,]\d{1,2})?|\d+(?:[.,]\d{1,2})?)"
_THOUSANDS = re.compile(r"[ ' \u2009\u202f.,](?=\d{3}(?!\d))")
_FORMS = (
    re.compile(rf"^\s*(?P<currency>[A-Z]{{3}}|[€$£])\s*{_AMOUNT}(?P<k>\s*k\b)?"),
    re.compile(rf"^\s*{_AMOUNT}(?P<k>\s*k)?\s*(?P<currency>[A-Z]{{3}}|[€$£])"),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Cost:
    """An amount in the currency it was stated in; currencies are never added together."""

    amount: float
    currency: str


def read_cost(text: str) -> Cost | None:
    """The amount and currency a text begins with; None where it begins with none."""
    for form in _FORMS:
        match = form.match(text)
        if match is None:
            continue
        digits = _THOUSANDS.sub("", match["amount"]).replace(",", ".")
        amount = float(digits) * (1000.0 if match["k"] else 1.0)
        return Cost(amount=amount, currency=_SIGNS.get(match["currency"], match["currency"]))
    return None
