"""What set a callback off."""

from __future__ import annotations

from dash import ctx


def pressed(kind: str) -> bool:
    """Whether a button of this type was really pressed, rather than drawn anew."""
    trigger = ctx.triggered_id
    if not isinstance(trigger, dict) or trigger.get("type") != kind:
        return False
    return any(each["value"] for each in ctx.triggered)
