"""JSON Schema of the settings files, for editors.

It is of draft 2020-12 and uses nothing that a reader of draft 7 does not know, as many editors know no more.
"""

from collections.abc import Iterable, Mapping
from typing import Any

from pydantic import BaseModel
from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue
from pydantic_core import core_schema

from airfield_board.configuration.file_models import FleetFile, ProfileFile
from airfield_board.configuration.fleet_checks import BAND_GROUPS, BY_WEIGHT_KEYS, LIMIT_GROUPS, LIMIT_KEYS

JsonSchema = dict[str, Any]

_DIALECT = "https://json-schema.org/draft/2020-12/schema"


class _WithoutNull(GenerateJsonSchema):
    """A key may be left out, which is not the same as null."""

    def nullable_schema(self, schema: core_schema.NullableSchema) -> JsonSchemaValue:
        """Return the schema of the value alone."""
        return self.generate_inner(schema["schema"])

    def default_schema(self, schema: core_schema.WithDefaultSchema) -> JsonSchemaValue:
        """Return the schema with its default, unless that is None: "left out"."""
        if schema.get("default") is None:
            return self.generate_inner(schema["schema"])
        return super().default_schema(schema)

    def field_title_should_be_set(self, schema: Any) -> bool:  # noqa: ANN401 - as the base class has it
        """Leave titles made of key names out; each key has a description."""
        del schema
        return False


def schema_of(model: type[BaseModel], title: str, between_keys: Mapping[str, Iterable[JsonSchema]]) -> JsonSchema:
    """Return the JSON Schema of a kind of file.

    Parameters
    ----------
    model
        What the file holds.
    title
        What the file is.
    between_keys
        By the name of a section's class: what its keys must have in common.
    """
    schema = model.model_json_schema(schema_generator=_WithoutNull, mode="validation")
    definitions: dict[str, JsonSchema] = schema.get("$defs", {})
    for name, rules in between_keys.items():
        definitions[name]["allOf"] = list(rules)
    for definition in definitions.values():
        # The class's name says nothing to a reader; its docstring does.
        definition.pop("title", None)
    schema["title"] = title
    return {"$schema": _DIALECT, **schema}


def profile_schema() -> JsonSchema:
    """Return the JSON Schema of airfield profiles."""
    return schema_of(
        ProfileFile,
        "Airfield profile",
        {
            "AirfieldSection": [
                _one_of(("elevation_ft", "elevation_m")),
                _both_or_neither("latitude", "longitude"),
            ],
            "ObservationsSection": [
                _not_both(("altimeter_resolution_inhg", "altimeter_resolution_hpa")),
                _not_both(("altimeter_accuracy_inhg", "altimeter_accuracy_hpa")),
            ],
        },
    )


def fleet_schema() -> JsonSchema:
    """Return the JSON Schema of fleets."""
    bands = [_not_both(group) for group in BAND_GROUPS]
    limits = [_not_both(group) for group in LIMIT_GROUPS if len(group) > 1]
    by_weight = [_one_of(BY_WEIGHT_KEYS)]
    by_weight_or_altitude = [_one_of((*BY_WEIGHT_KEYS, "by_pressure_altitude_ft"))]
    return schema_of(
        FleetFile,
        "Fleet",
        {
            "BandsSection": bands,
            "OperationSection": [{"anyOf": [{"required": [key]} for key in LIMIT_KEYS]}, *bands, *limits],
            "AltitudeTableFt": by_weight,
            "AltitudeTableM": by_weight,
            "DeviationTableC": by_weight,
            "TemperatureTableC": by_weight_or_altitude,
            "TemperatureTableF": by_weight_or_altitude,
        },
    )


def _one_of(keys: Iterable[str]) -> JsonSchema:
    return {"oneOf": [{"required": [key]} for key in keys]}


def _not_both(keys: Iterable[str]) -> JsonSchema:
    return {"not": {"required": list(keys)}}


def _both_or_neither(first: str, second: str) -> JsonSchema:
    neither = {"not": {"anyOf": [{"required": [first]}, {"required": [second]}]}}
    return {"anyOf": [{"required": [first, second]}, neither]}
