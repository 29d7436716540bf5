"""Commands and Python are one thing: the same verbs, names and defaults.

A command is held against the function of its name, in `sweep` or of `Results`.  What differs is
listed here with its reason, and an exception that is no longer needed is a fault.
"""

from __future__ import annotations

import inspect
from collections.abc import Callable
from importlib import import_module
from typing import Any

import click
import pytest

import sweep
from sweep.cli import COMMANDS
from sweep.results import Results

# A command whose function has another name, or that has none.
OTHER_NAME = {
    "show": "survival",  # the survival counts; printing the results shows the summary
}
NO_FUNCTION = {
    "completion": "it concerns the shell alone",
}
# Left out of every function.
EVERYWHERE = {
    "store": "Results are those of a store: sweep.open_results(store, sweep)",
    "sweep": "Results are those of one sweep: sweep.open_results(store, sweep)",
    "form": "Python returns objects and frames; how they are printed is theirs",
    "quiet": "Python says nothing; progress is a function that one may give",
}
# Left out of one function: command, parameter of the command, reason.
OPTIONS = {
    ("run", "report"): "Results.report is its own step in Python",
    ("run", "rules"): "a rule is for scripts that look at the exit code",
    ("show", "sweeps"): "Results.sweeps is its own method",
    ("schema", "output"): "Python returns the schema",
    ("table", "output"): "the table that is returned saves itself",
    ("chart", "output"): "Results.save_chart writes files",
    ("chart", "formats"): "Results.save_chart writes files",
    ("compare", "against"): "the other Results are those of a sweep already",
    ("compare", "part"): "the object that is returned has its parts as frames",
    ("compare", "output"): "the object that is returned writes its own page",
}
# In a function alone: command, parameter of the function, reason.
PARAMETERS = {
    ("run", "progress"): "the command draws its own",
    ("verify", "progress"): "the command draws its own",
    ("report", "content"): "what a run has at hand already",
    ("report", "library"): "what a run has at hand already",
}


def command_of(name: str) -> click.Command:
    command = import_module(f"sweep.cli.{name}").command
    assert isinstance(command, click.Command)
    return command


def function_of(name: str) -> Callable[..., Any]:
    verb = OTHER_NAME.get(name, name)
    found = getattr(Results, verb, None) or getattr(sweep, verb)
    assert callable(found)
    return found


def parameters_of(name: str) -> dict[str, inspect.Parameter]:
    found = dict(inspect.signature(function_of(name)).parameters)
    found.pop("self", None)
    return found


def command_parameters(name: str) -> dict[str, click.Parameter]:
    # An option that prints and leaves, such as --list, gives the command no value.
    return {str(item.name): item for item in command_of(name).params if item.expose_value}


def left_out(name: str, parameter: str) -> bool:
    if (name, parameter) in OPTIONS:
        return True
    # run has a store to name: the one that it writes.
    return parameter in EVERYWHERE and parameter not in parameters_of(name)


def default_of(item: click.Parameter) -> object:
    """Return the default as a function would have it."""
    with click.Context(click.Command("any")) as context:
        default = item.get_default(context)
    # Where nothing is given, click passes None, and a flag that was not set is False.
    plain = isinstance(default, int | float | str) and not isinstance(default, type)
    return default if plain else None


VERBS = [name for name in COMMANDS if name not in NO_FUNCTION]


@pytest.mark.parametrize("name", VERBS)
def test_every_option_is_a_parameter_with_the_same_default(name: str) -> None:
    parameters = parameters_of(name)
    for key, item in command_parameters(name).items():
        if left_out(name, key):
            continue
        assert key in parameters, f"crosswind {name} has {key}, Python has not"
        ours = parameters[key].default
        if item.required:
            assert ours is inspect.Parameter.empty, key
        else:
            assert ours == default_of(item), f"{name}: {key} is {ours!r} in Python"


@pytest.mark.parametrize("name", VERBS)
def test_every_parameter_is_an_option(name: str) -> None:
    options = command_parameters(name)
    for key in parameters_of(name):
        assert key in options or (name, key) in PARAMETERS, f"{name}: {key} is in Python alone"


@pytest.mark.parametrize("name", VERBS)
def test_arguments_come_first_and_in_the_same_order(name: str) -> None:
    arguments = [
        str(item.name)
        for item in command_of(name).params
        if isinstance(item, click.Argument) and not left_out(name, str(item.name))
    ]
    assert list(parameters_of(name))[: len(arguments)] == arguments


def test_exceptions_are_needed() -> None:
    for name in NO_FUNCTION:
        assert name in COMMANDS
        assert not hasattr(sweep, name)
        assert not hasattr(Results, name)
    for name, key in OPTIONS:
        assert key in command_parameters(name)
        assert key not in parameters_of(name)
    for name, key in PARAMETERS:
        assert key in parameters_of(name)
        assert key not in command_parameters(name)
    for name, verb in OTHER_NAME.items():
        assert name in COMMANDS
        assert not hasattr(Results, name)
        assert hasattr(Results, verb)
    everything = {key for name in COMMANDS for key in command_parameters(name)}
    assert set(EVERYWHERE) <= everything


def test_verbs_are_those_that_the_package_names() -> None:
    functions = {name for name in VERBS if not hasattr(Results, OTHER_NAME.get(name, name))}
    assert functions <= set(sweep.__all__)
    # Beside the verbs: what makes the objects that they work on.
    assert set(sweep.__all__) - functions == {"__version__", "load_plan", "open_results"}


@pytest.mark.parametrize("name", sweep.__all__)
def test_the_package_gives_what_it_names(name: str) -> None:
    assert getattr(sweep, name) is not None
