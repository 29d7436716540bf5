"""Rewrite the generated parts of README.md: help, plan keys, store columns, the example's summary.

    python tests/docs/regenerate.py

A part stands between ``<!-- generated: NAME -->`` and ``<!-- end of generated: NAME -->``; the
tests fail when it differs from what the code says now.
"""

from __future__ import annotations

import json
import re
import tempfile
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parents[2]
README = ROOT / "README.md"
WIDTH = 84

# Table of the schema and how it is named in the plan file, in the order of a plan.
TABLES = {
    "Crosswind plan": "Top level",
    "DataTable": "`[data]`",
    "FindingTable": "`[[findings]]`",
    "ExogenousTable": "an entry of `exogenous`",
    "BaselineTable": "`[baseline]`",
    "ReportedTable": "`[baseline.reported]`",
    "AxesTable": "`[axes]`",
    "LagTable": "a lag entry `{ … }`",
    "DeterministicTable": "a deterministics entry `{ … }`",
    "WindowTable": "a window entry `{ … }`",
    "TransformationTable": "a transformation entry `{ … }`",
    "ProcedureTable": "a test entry `{ … }`",
    "MeasureTable": "a measures entry `{ … }`",
    "RuleTable": "`[[rule_out]]`",
    "WhenTable": "`when` of `[[rule_out]]`",
    "ScreensTable": "`[screens]`",
    "SweepTable": "`[sweep]`",
    "RequestTable": "`[[requests]]`",
}
# Small tables that are written out where they are used.
INLINE = {"SampleTable": "{ common = … }", "SampleDesign": "{ sample = … }"}
TYPES = {
    "string": "text",
    "integer": "whole number",
    "number": "number",
    "boolean": "true or false",
    "object": "table",
}


def commands() -> str:
    """Return the help of the program and of every command, as it is printed."""
    from click.testing import CliRunner

    from sweep.cli import COMMANDS, group

    parts = []
    for name in ("", *COMMANDS):
        arguments = [name, "--help"] if name else ["--help"]
        done = CliRunner().invoke(
            group, arguments, prog_name="crosswind", terminal_width=WIDTH, max_content_width=WIDTH
        )
        if done.exit_code:
            raise RuntimeError(f"crosswind {name} --help: {done.output}")
        heading = f"#### crosswind {name}\n\n" if name else ""
        parts.append(f"{heading}```text\n{done.output.rstrip()}\n```")
    return "\n\n".join(parts)


def plan_keys() -> str:
    """Return one table for each table of the plan file: key, value, default, meaning."""
    from sweep.plan.schema import schema_text

    schema = json.loads(schema_text())
    tables = {schema["title"]: schema, **schema["$defs"]}
    unknown = set(tables) - set(TABLES) - set(INLINE)
    if unknown:
        raise RuntimeError(f"tables of the schema without a place in the README: {unknown}")
    order = _key_order()
    lines = [f"- *{words}*: {_listed(names)}" for words, names in _names().items()]
    parts = ["\n".join(lines)]
    for name, heading in TABLES.items():
        table = tables[name]
        if name == "WhenTable":
            keys = ", ".join(f"`{key}`" for key in order[name])
            parts.append(f"**{heading}**: {keys}, each a list of choices or of their names.")
            continue
        required = set(table.get("required", ()))
        if name == schema["title"]:  # needed unless the plan extends one that has them
            required = set(schema["anyOf"][-1]["required"])
        lines = [f"**{heading}**", "", "| key | value | default | meaning |", "|---|---|---|---|"]
        for key in order[name]:
            value = table["properties"][key]
            default = "*needed*" if key in required else _default(value)
            cells = (f"`{key}`", _value(value), default, _meaning(value, tables))
            lines.append("| " + " | ".join(cells) + " |")
        parts.append("\n".join(lines))
    return "\n\n".join(parts)


def _names() -> dict[str, tuple[str, ...]]:
    """Return the lists of names that several keys take, under the word that stands for them."""
    from typing import get_args

    from sweep.plan import tables

    return {
        "criterion": get_args(tables.CRITERIA),
        "trend": get_args(tables.TRENDS),
        "transformation": get_args(tables.TRANSFORMATIONS),
        "statistic": get_args(tables.STATISTICS),
        "covariance": get_args(tables.COVARIANCES),
    }


def _listed(names: Sequence[str]) -> str:
    return ", ".join(f'`"{name}"`' for name in names)


def _key_order() -> dict[str, list[str]]:
    """Return the keys of every table in the order of the code (the schema sorts them)."""
    from sweep.plan import document, tables

    order = {}
    for name in TABLES:
        model = document.PlanDocument
        if name != "Crosswind plan":
            model = getattr(document, name, None) or getattr(tables, name)
        held = set(model.model_json_schema(by_alias=True)["properties"])
        fields = model.model_fields.items()
        # What every entry may carry is said once, above the tables.
        common = set(tables.Named.model_fields) if issubclass(model, tables.Named) else set()
        keys = [field.alias or key for key, field in fields if key not in common]
        order[name] = [key for key in keys if key in held]
    return order


def _value(schema: dict[str, Any]) -> str:
    """Say in words what may be written for a key."""
    for several in ("anyOf", "oneOf"):
        if several in schema:
            kinds = [_value(part) for part in schema[several] if part.get("type") != "null"]
            return " or ".join(dict.fromkeys(kinds))
    if "enum" in schema or "const" in schema:
        names = tuple(schema.get("enum", [schema.get("const")]))
        known = {every: word for word, every in _names().items()}
        return f"*{known[names]}*" if names in known else _listed(names)
    if "$ref" in schema:
        name = schema["$ref"].rsplit("/", 1)[1]
        if name in INLINE:
            return f"`{INLINE[name]}`"
        return TABLES[name] if name.endswith("Table") and "`[" in TABLES[name] else "`{ … }`"
    kind = schema.get("type")
    if isinstance(kind, list):
        return "date"
    if kind == "array":
        inner = _value(schema.get("items", {}))
        return "[first date, last date]" if "maxItems" in schema else f"list of {inner}"
    if kind == "object" and isinstance(schema.get("additionalProperties"), dict):
        return f"{{ series or role = {_value(schema['additionalProperties'])} }}"
    return TYPES.get(str(kind), "choices or their names")


def _default(schema: dict[str, Any]) -> str:
    default = schema.get("default")
    if default in (None, "", []) or isinstance(default, dict):
        return "–"
    if isinstance(default, bool):
        return f"`{str(default).lower()}`"
    return f"`{json.dumps(default)}`"


def _meaning(schema: dict[str, Any], tables: dict[str, Any]) -> str:
    """Return the description of a key, or of the table or list that it holds."""
    if "description" in schema:
        return str(schema["description"])
    if "$ref" in schema:
        return str(tables[schema["$ref"].rsplit("/", 1)[1]]["description"])
    held = [*schema.get("anyOf", ()), schema.get("items"), schema.get("additionalProperties")]
    told = (_meaning(part, tables) for part in held if isinstance(part, dict))
    return next((words for words in told if words), "")


def store_columns() -> str:
    """Return the columns of every table and view of a new store."""
    from store.database import create
    from store.schema import schema_sql

    with tempfile.TemporaryDirectory() as folder, create(Path(folder) / "new.duckdb") as database:
        views = {
            name: [
                str(row[0])
                for row in database.execute(f"SELECT column_name FROM (DESCRIBE {name})")
            ]
            for name in ("outcomes", "survival")
        }
    lines = [f"- view `{name}`: {', '.join(columns)}" for name, columns in views.items()]
    for name, body in re.findall(r"CREATE TABLE (\w+) \(\n(.*?)\n\);", schema_sql(), re.DOTALL):
        columns = [line.split()[0].strip('"') for line in body.splitlines()]
        lines.append(f"- table `{name}`: {', '.join(columns)}")
    return "\n".join(lines)


def example_summary() -> str:
    """Run the README's example and return what it says of its first finding."""
    from click.testing import CliRunner

    import sweep
    from sweep.cli import group

    with tempfile.TemporaryDirectory() as folder:
        results = sweep.run(ROOT / "configs" / "us_macro.toml", store=Path(folder) / "us.duckdb")
        name = str(results.findings["name"].iloc[0])
        done = CliRunner().invoke(
            group, ["show", str(results.store), "--finding", name], env={"COLUMNS": "96"}
        )
    if done.exit_code:
        raise RuntimeError(done.output)
    return f"```text\n{done.output.strip()}\n```"


QUICK: dict[str, Callable[[], str]] = {
    "commands": commands,
    "plan keys": plan_keys,
    "store": store_columns,
}
SLOW: dict[str, Callable[[], str]] = {"example summary": example_summary}


def _pattern(name: str) -> re.Pattern[str]:
    start, end = f"<!-- generated: {name} -->\n", f"<!-- end of generated: {name} -->"
    return re.compile(f"({re.escape(start)})(.*?)({re.escape(end)})", re.DOTALL)


def part(name: str, text: str) -> str:
    """Return what stands between the markers of a part.

    Raises
    ------
    ValueError
        If the part has no markers, or more than one pair.
    """
    found = _pattern(name).findall(text)
    if len(found) != 1:
        raise ValueError(f"README.md has {len(found)} parts called {name!r}, not one")
    return str(found[0][1]).removesuffix("\n")


def main() -> None:
    """Rewrite every part."""
    text = README.read_text(encoding="utf-8")
    for name, make in (QUICK | SLOW).items():
        part(name, text)
        made = make()
        text = _pattern(name).sub(lambda match, new=made: match[1] + new + "\n" + match[3], text)
    README.write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
