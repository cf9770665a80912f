"""A report as canonical JSON and back. The page is made from this text alone, so the two can never differ."""

from __future__ import annotations

import hashlib
import json
import types
from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from typing import Any, Union, get_args, get_origin, get_type_hints

import pandas as pd

from outcomes.errors import UsageError
from outcomes.report.model import Report

FORMAT = 1  # raised when the shape of results.json changes
_ORDER = "~"


def results_json(report: Report) -> str:
    """Every result, table, sentence and caution of a report as canonical JSON: sorted keys, ASCII, no space.

    ValueError for a number that is not finite.
    """
    content = {"format": FORMAT, "report": _plain(report)}
    return json.dumps(content, sort_keys=True, ensure_ascii=True, allow_nan=False, separators=(",", ":"))


def report_id(text: str) -> str:
    """First 12 hexadecimal digits of SHA-256 over results.json, which everyone can compute again."""
    return hashlib.sha256(text.encode("ascii")).hexdigest()[:12]


def report_from_json(text: str) -> Report:
    """The report of a results.json. UsageError if it is of another format or incomplete."""
    try:
        content = json.loads(text)
        if content["format"] != FORMAT:
            raise UsageError("REPORT.JSON", "the results file is of another format", todo="make it anew")
        made: Report = _made(Report, content["report"])
    except (KeyError, TypeError, ValueError):
        raise UsageError("REPORT.JSON", "the results file is incomplete or no results file") from None
    return made


def _plain(value: Any) -> Any:
    if isinstance(value, pd.DataFrame):
        return _plain_frame(value)
    if is_dataclass(value):
        return {f.name: _plain(getattr(value, f.name)) for f in fields(value) if f.init}
    if isinstance(value, Mapping):
        return {str(key): _plain(item) for key, item in value.items()} | _order(value)
    if isinstance(value, tuple | list):
        return [_plain(item) for item in value]
    if hasattr(value, "item"):
        return value.item()
    return value


def _order(value: Mapping[str, Any]) -> dict[str, list[str]]:
    """The order of a mapping that is not sorted, under a key of its own: canonical JSON sorts keys."""
    keys = [str(key) for key in value]
    if _ORDER in keys:
        raise ValueError("a key of a report may not be a tilde")
    return {_ORDER: keys} if keys != sorted(keys) else {}


def _plain_frame(frame: pd.DataFrame) -> dict[str, Any]:
    columns = {str(name): _plain_column(frame[name]) for name in frame.columns}
    return {"columns": [str(name) for name in frame.columns], "values": columns}


def _plain_column(column: pd.Series) -> list[Any]:
    missing = column.isna().to_list()
    values = column.astype(object).to_list()
    return [None if gone else _plain(value) for gone, value in zip(missing, values, strict=True)]


def _made(kind: Any, value: Any) -> Any:
    """The value as the type says it is."""
    if kind is pd.DataFrame:
        return _made_frame(value)
    if is_dataclass(kind):
        hints = get_type_hints(kind)
        wanted = [f.name for f in fields(kind) if f.init]
        return kind(**{name: _made(hints[name], value[name]) for name in wanted})  # type: ignore[operator]
    origin, inner = get_origin(kind), get_args(kind)
    if origin is tuple:
        each = inner[:1] * len(value) if inner[-1] is Ellipsis else inner
        return tuple(_made(one, item) for one, item in zip(each, value, strict=True))
    if origin in (Union, types.UnionType):
        return value
    if origin is not None:  # the only other generic in the model is Mapping
        keys = value.get(_ORDER, sorted(key for key in value if key != _ORDER))
        return {key: _made(inner[1], value[key]) for key in keys}
    return value if kind is Any else kind(value)


def _made_frame(value: Mapping[str, Any]) -> pd.DataFrame:
    frame = pd.DataFrame(index=range(len(next(iter(value["values"].values()), []))))
    for name in value["columns"]:
        column = value["values"][name]
        frame[name] = pd.array(
            column, dtype=_dtype(name, {type(item) for item in column if item is not None})
        )
    return frame


def _dtype(name: str, found: set[type]) -> str:
    """The column's nullable type, so that writing it again gives the same text."""
    if found <= {bool} and found:
        return "boolean"
    if found <= {int} and found:
        return "Int64"
    if found <= {int, float} and (found or name not in ("group", "cause", "state", "reason")):
        return "Float64"
    return "string"
