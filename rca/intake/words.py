"""Controlled words: the word itself, or the nearest known ones."""

import difflib
from collections.abc import Iterable


def nearest(word: str, known: Iterable[str], *, most: int = 3) -> tuple[str, ...]:
    """The known words most like ``word``, the nearest first; empty where none is like it."""
    by_folded = {one.casefold(): one for one in known}
    close = difflib.get_close_matches(word.casefold().strip(), by_folded, n=most, cutoff=0.5)
    parts = [k for k in by_folded if word.casefold().strip() and word.casefold().strip() in k]
    return tuple(dict.fromkeys(by_folded[k] for k in (*close, *parts)))[:most]


def mend_word(word: str, known: Iterable[str]) -> str:
    """What to write instead of an unknown word."""
    words = tuple(known)
    near = nearest(word, words)
    if near:
        return f"Did you mean {' or '.join(repr(n) for n in near)}?"
    return f"Known words: {', '.join(words)}."
