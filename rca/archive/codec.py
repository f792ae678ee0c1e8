"""Typed results to JSON and back.

Records are frozen dataclasses; ``cattrs`` walks them. JSON has no NaN or infinity, so those are
written as the strings "nan", "inf" and "-inf" and read back as floats; nothing is rounded.
"""

import json
import math
from datetime import date, datetime
from typing import Any, TypeVar

from cattrs import Converter
from cattrs.errors import BaseValidationError
from cattrs.strategies import configure_union_passthrough

from rca.base.errors import ArchiveError

T = TypeVar("T")


def _float_out(value: float) -> float | str:
    number = float(value)
    return number if math.isfinite(number) else str(number)


def _datetime_out(value: datetime) -> str:
    return value.isoformat()


def _date_out(value: date) -> str:
    return value.isoformat()


def _date_in(value: str, _: type) -> date:
    return date.fromisoformat(value)


def _datetime_in(value: str, _: type) -> datetime:
    return datetime.fromisoformat(value)


def _moment_in(value: str, _: type) -> date | datetime:
    return datetime.fromisoformat(value) if "T" in value else date.fromisoformat(value)


def _converter() -> Converter:
    converter = Converter(omit_if_default=False, unstruct_collection_overrides={tuple: list})
    configure_union_passthrough(str | int | float | bool | None, converter)
    converter.register_unstructure_hook(float, _float_out)
    converter.register_unstructure_hook(datetime, _datetime_out)
    converter.register_unstructure_hook(date, _date_out)
    converter.register_structure_hook(date, _date_in)
    converter.register_structure_hook(datetime, _datetime_in)
    converter.register_structure_hook(datetime | date, _moment_in)
    converter.register_structure_hook(date | datetime, _moment_in)
    return converter


_CONVERTER = _converter()


def to_plain(record: object) -> Any:
    """A typed record as dicts, lists, strings, numbers, booleans and None."""
    return _CONVERTER.unstructure(record)


def from_plain(kind: type[T], plain: object) -> T:
    """A typed record from what ``to_plain`` gave.

    Raises ArchiveError where the stored form does not fit the type.
    """
    try:
        return _CONVERTER.structure(plain, kind)
    except (BaseValidationError, ValueError, TypeError, KeyError) as error:
        raise ArchiveError(
            f"a stored {kind.__name__} does not have the expected shape: {error}. "
            "It was written by another version of this program, or changed by hand; "
            "run the report again."
        ) from error


def dumps(plain: object) -> str:
    """Canonical JSON: sorted keys, two-space indent, no NaN, one final newline."""
    return json.dumps(plain, indent=2, sort_keys=True, ensure_ascii=False, allow_nan=False) + "\n"
