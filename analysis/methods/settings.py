"""Settings of a method carry their range and label; the command line and the screen make their controls from them."""

from __future__ import annotations

from dataclasses import field, fields
from typing import Any

from analysis.errors import SettingError


def setting(
    default: Any,
    *,
    label: str,
    low: float | None = None,
    high: float | None = None,
    choices: tuple[str, ...] = (),
) -> Any:
    """Return a dataclass field that knows its label and its range (both ends included) or its choices."""
    return field(default=default, metadata={"label": label, "low": low, "high": high, "choices": choices})


def check_settings(method: Any) -> None:
    """Raise `SettingError` where a setting of the method lies outside its range or choices."""
    for each in fields(method):
        value = getattr(method, each.name)
        low, high, choices = (each.metadata.get(key) for key in ("low", "high", "choices"))
        if choices and value not in choices:
            raise SettingError(f"{each.metadata['label']} is {value!r}; choose one of {', '.join(choices)}")
        below = low is not None and not value >= low
        above = high is not None and not value <= high
        if below or above:
            raise SettingError(f"{each.metadata['label']} is {value}; it must lie between {low} and {high}")


def settings_of(method: Any) -> dict[str, float | int | str | None]:
    """Return the settings of a method as plain values, in the order in which they are defined."""
    return {each.name: getattr(method, each.name) for each in fields(method)}
