"""JSON Schema of rule files, for completion and checking in editors; made from the catalogue the loader reads by."""

from __future__ import annotations

from typing import Any

from analyzer import limits
from analyzer.quantity import Dimension
from analyzer.recognise.rule_tables import DECODES, SIGNS, THETAS
from analyzer.rule import FIGURES, BoardClass, Role, Topology

Schema = dict[str, Any]

_SOURCE: Schema = {
    "source": {"type": "string", "description": "document and place the figures come from"},
    "verified": {"type": "boolean", "description": "false for figures from memory: caps the grade at presumed"},
}
_NOTE: Schema = {"note": {"type": "string"}}
_TEXTS: Schema = {"oneOf": [{"type": "string"}, {"type": "array", "items": {"type": "string"}}]}


def rules_schema() -> Schema:
    """The schema of a rule file."""
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "heatledger rule file",
        "type": "object",
        "additionalProperties": False,
        "properties": {
            "rule": _entries({**_channel(), **_rule()}, ["name", "kind", "match"]),
            "load": _entries(
                {"name": _name(), "match": _match(), "supplies": _map(Dimension.CURRENT), **_SOURCE}, ["name", "match"]
            ),
            "supply": _entries(
                {"name": _name(), "nets": _TEXTS, "volts": _quantity(Dimension.VOLTAGE), **_SOURCE, **_NOTE},
                ["name", "volts"],
            ),
            "package": _entries(
                {"name": _name(), "footprints": _TEXTS, "theta_ja": _by_board(), **_SOURCE, **_NOTE}, ["name"]
            ),
        },
    }


def _rule() -> Schema:
    return {
        "match": _match(),
        "makers": {**_TEXTS, "description": "accepted letters before the number; none accepts any"},
        "letters": {**_TEXTS, "description": "reference letters the part may have"},
        "external": {**_TEXTS, "description": "what takes part of the heat: inductor, diode, transistor"},
        "channel": _entries(_channel(), []),
        "thermal": _entries(_thermal(), ["package"]),
        **_SOURCE,
        **_NOTE,
    }


def _channel() -> Schema:
    return {
        "name": _name(),
        "kind": {"enum": [topology.value for topology in Topology]},
        "sign": {"enum": list(SIGNS)},
        "reference_across": {"enum": ["lower", "upper"]},
        "pins": _object({role.value: _TEXTS for role in Role}),
        "volts": _quantity(Dimension.VOLTAGE, "output voltage of a part that has only one"),
        "efficiency_map": _rows(3, "load, input voltage, efficiency"),
        **{key: _figure(key) for key in FIGURES},
    }


def _figure(key: str) -> Schema:
    figure = FIGURES[key]
    one = _quantity(figure.dimension)
    meaning = f"{figure.meaning} (data sheet: {figure.where})"
    if figure.may_be_curve:
        return {"anyOf": [one, _rows(2, "load current, figure")], "description": meaning}
    return {**one, "description": meaning}


def _thermal() -> Schema:
    theta = Dimension.THERMAL_RESISTANCE
    return {
        "package": {"type": "string", "description": "package family as in packages.toml"},
        **{key: _quantity(theta) for key in THETAS},
        "board": {"enum": [one.value for one in BoardClass]},
        "copper": _rows(2, "copper area, θJA"),
        "air": _rows(2, "air speed, θJA"),
        "foster": _rows(2, "resistance, time constant"),
        **_SOURCE,
        **_NOTE,
    }


def _match() -> Schema:
    pattern = {
        "pattern": {
            "type": "string",
            "maxLength": limits.PATTERN_LENGTH,
            "description": "* ? {code}, {maker} at its start",
        },
        "decode": {"enum": list(DECODES)},
        "codes": {**_TEXTS, "description": "the only codes accepted"},
        "table": _map(Dimension.VOLTAGE),
    }
    return {"type": "array", "minItems": 1, "items": _object(pattern, ["pattern"])}


def _name() -> Schema:
    return {"type": "string", "minLength": 1}


def _quantity(dimension: Dimension, description: str = "") -> Schema:
    if dimension is Dimension.RATIO:
        return {"type": ["string", "number"], "description": description or "a ratio or percentage"}
    return {"type": "string", "description": description or f"text with a unit, in {dimension.value}"}


def _map(dimension: Dimension) -> Schema:
    return {"type": "object", "additionalProperties": _quantity(dimension)}


def _by_board() -> Schema:
    return _object({one.value: _quantity(Dimension.THERMAL_RESISTANCE) for one in BoardClass})


def _rows(width: int, description: str) -> Schema:
    row = {"type": "array", "items": {"type": "string"}, "minItems": width, "maxItems": width}
    return {"type": "array", "items": row, "description": description}


def _object(properties: Schema, required: list[str] | None = None) -> Schema:
    shape: Schema = {"type": "object", "additionalProperties": False, "properties": properties}
    return {**shape, "required": required} if required else shape


def _entries(properties: Schema, required: list[str]) -> Schema:
    return {"type": "array", "items": _object(properties, required)}


def schema_text() -> str:
    """The schema as the file beside the shipped rules has it."""
    import json

    return json.dumps(rules_schema(), ensure_ascii=False, indent=1, sort_keys=True) + "\n"
