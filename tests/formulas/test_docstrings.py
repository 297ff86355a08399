"""Every public formula says its parameters with their units, its source, and an example that runs."""

import ast
import doctest
import importlib
import inspect
import pkgutil
import re

import pytest

import modgen.formulas

MODULES = sorted(m.name for m in pkgutil.iter_modules(modgen.formulas.__path__))

#: how many examples there are, in statements; a new one is counted here, so that none can stop unseen
EXAMPLES = {
    "amplifier": 7,
    "glide": 5,
    "land_pattern": 7,
    "leakage": 5,
    "loading": 3,
    "noise": 4,
    "pitch": 4,
    "series": 3,
    "shorts": 2,
    "stability": 7,
    "supply": 4,
    "tolerance": 5,
}

#: units that a docstring may use, in base SI but for the degrees, decibels and cents that people think in
KNOWN = {
    "-",
    "V",
    "A",
    "ohm",
    "F",
    "s",
    "m",
    "W",
    "K",
    "degC",
    "dB",
    "cents",
    "1/s",
    "A, V",
    "Hz",
    "deg",
    "V/rtHz",
    "A/rtHz",
    "ohm, F, ohm",
}

NAME = re.compile(r"^([*\w, ]+) : .+$")


def formulas():
    """Every public function, with its module."""
    for name in MODULES:
        module = importlib.import_module(f"modgen.formulas.{name}")
        for function_name, function in inspect.getmembers(module, inspect.isfunction):
            if not function_name.startswith("_") and function.__module__ == module.__name__:
                yield pytest.param(function, id=f"{name}.{function_name}")


def sections(function):
    """The docstring's sections by heading, each a list of lines."""
    found = {"Summary": []}
    lines = inspect.getdoc(function).splitlines()
    heading = "Summary"
    for line, below in zip(lines, [*lines[1:], ""], strict=True):
        if re.fullmatch("-{3,}", below):
            heading = line
            found[heading] = []
        elif not re.fullmatch("-{3,}", line):
            found[heading].append(line)
    return found


def entries(lines):
    """Parameter entries: name to description."""
    found = {}
    name = None
    for line in lines:
        match = NAME.match(line)
        if match:
            name = match[1]
            found[name] = ""
        elif name and line.startswith(" "):
            found[name] += " " + line.strip()
    return found


def unit(description):
    """The unit in brackets that ends a description."""
    match = re.search(r"\[([^\]]+)\](?: or \[([^\]]+)\])?$", description.strip())
    return [u for u in match.groups() if u] if match else []


@pytest.mark.parametrize("function", list(formulas()))
def test_parameters_equal_the_signature(function):
    parameters = inspect.signature(function).parameters
    written = [("*" if p.kind is p.VAR_POSITIONAL else "") + name for name, p in parameters.items()]
    assert list(entries(sections(function)["Parameters"])) == written


@pytest.mark.parametrize("function", list(formulas()))
def test_every_parameter_and_result_has_a_known_unit(function):
    found = sections(function)
    described = entries(found["Parameters"])
    described["the result"] = " ".join(line.strip() for line in found["Returns"][1:])
    for name, description in described.items():
        units = unit(description)
        assert units, f"{name} does not end in a unit: {description}"
        assert set(units) <= KNOWN, f"{name} has the unit {units}"


@pytest.mark.parametrize("function", list(formulas()))
def test_references_and_an_example(function):
    found = sections(function)
    assert any(line.startswith(".. [1] ") for line in found["References"])
    assert any(line.startswith(">>> ") for line in found["Examples"])


@pytest.mark.parametrize("function", list(formulas()))
def test_raises_is_there_when_it_raises(function):
    raises = any(isinstance(node, ast.Raise) for node in ast.walk(ast.parse(inspect.getsource(function))))
    if raises:
        assert "ValueError" in sections(function)["Raises"]


def test_examples_are_counted():
    assert sorted(EXAMPLES) == MODULES


@pytest.mark.parametrize("name", MODULES)
def test_examples_run(name):
    result = doctest.testmod(importlib.import_module(f"modgen.formulas.{name}"))
    assert result == doctest.TestResults(failed=0, attempted=EXAMPLES[name])
