"""The JSON Schema of the plan file."""

from __future__ import annotations

import json

from sweep.plan.document import PlanDocument

__all__ = ["schema_text"]


def schema_text() -> str:
    """Return the JSON Schema (draft 2020-12) of a plan, as indented text."""
    schema = PlanDocument.model_json_schema(by_alias=True)
    # A plan that starts from another may leave out what that one says.
    needed = schema.pop("required")
    schema["anyOf"] = [{"required": ["extends"]}, {"required": needed}]
    schema = {"$schema": "https://json-schema.org/draft/2020-12/schema", **schema}
    schema["title"] = "Crosswind plan"
    return json.dumps(schema, indent=1, ensure_ascii=False, sort_keys=True) + "\n"
