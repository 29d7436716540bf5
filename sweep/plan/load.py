"""Read a plan file and report everything that is wrong with it at once."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from sweep.errors import Fault, InputFault
from sweep.plan.axes import build_plan
from sweep.plan.document import PlanDocument
from sweep.plan.extends import Written, read_text, resolve
from sweep.plan.model import Plan
from sweep.plan.suggest import suggestion

__all__ = ["load_plan", "plan_from_text"]


def load_plan(path: str | Path) -> Plan:
    """Read and validate a plan file; the data are not read.

    Parameters
    ----------
    path : str or Path
        A TOML file as the README describes it.

    Returns
    -------
    Plan

    Raises
    ------
    InputFault
        With every fault of the file, each with its path and a suggestion.
    """
    path = Path(path)
    return plan_from_text(read_text(path), path)


def plan_from_text(text: str, path: Path) -> Plan:
    """Validate the text of a plan file as if it stood at ``path``.

    Raises
    ------
    InputFault
        With every fault found.
    """
    written = resolve(text, path)
    try:
        document = PlanDocument.model_validate(written.content)
    except ValidationError as error:
        raise InputFault(*(_fault(item) for item in error.errors())) from None
    if len(written.files) == 1:
        return build_plan(document, text, path)
    plan = build_plan(document, _resolved_text(written), path)
    return replace(plan, origin=written.files[-1], replaced=written.replaced)


def _resolved_text(written: Written) -> str:
    """Write out a plan that extends others, so that it can be read without them."""
    import tomli_w

    names = [path.name for path in written.files]
    words = f"# {names[0]}, which starts from " + ", which starts from ".join(names[1:])
    return f"{words}; written out whole.\n\n{tomli_w.dumps(written.content)}"


def _fault(item: Any) -> Fault:
    context = item.get("ctx") or {}
    kind = str(context.get("kind", item["type"]))
    place = _place(item["loc"])
    text = str(context.get("text", item["msg"])).rstrip(".")
    if kind == "missing":
        return Fault(place, "this key is missing", "Add it.")
    if kind in ("literal_error", "union_tag_invalid"):
        known = re.findall(r"'([^']*)'", text)
        return Fault(place, f'"{item["input"]}" is not known here' + _near(item["input"], known))
    if kind.startswith(("greater_than", "less_than")):
        return Fault(place, f"{item['input']} is out of range", text.replace("Input", "It") + ".")
    if kind == "too_short":
        return Fault(place, "an empty list leaves nothing to run", "Give at least one choice.")
    if kind == "string_too_short":
        return Fault(place, "the text is empty", "Write something.")
    if kind in _TYPES:
        found = _TYPE_WORDS.get(type(item["input"]).__name__, type(item["input"]).__name__)
        return Fault(place, f"{_TYPES[kind]} is needed here, not {found}")
    return Fault(place, text[:1].lower() + text[1:] if text.startswith("Input") else text)


_TYPES = {
    "int_type": "a whole number",
    "int_parsing": "a whole number or a known name",
    "int_from_float": "a whole number",
    "float_type": "a number",
    "float_parsing": "a number",
    "string_type": "a text in quotes",
    "bool_type": "true or false",
    "list_type": "a list in [brackets]",
    "dict_type": "a table",
    "model_type": "a table",
    "model_attributes_type": "a table",
}
_TYPE_WORDS = {
    "str": "a text",
    "int": "a number",
    "float": "a number with a decimal point",
    "bool": "true or false",
    "list": "a list",
    "dict": "a table",
    "date": "a date",
    "datetime": "a date and time",
}


def _near(word: Any, known: list[str]) -> str:
    return suggestion(str(word), known)


def _place(location: tuple[int | str, ...]) -> str:
    """Write a location as it would be pointed at in the file."""
    text = ""
    for part in location:
        if isinstance(part, int):
            text += f"[{part + 1}]"
        elif not str(part).startswith("~"):
            text += f".{part}" if text else str(part)
    return text or "the plan"
