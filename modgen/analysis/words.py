"""Quantities as they stand in the words of an analysis."""

from __future__ import annotations

from modgen.units import format_quantity


def ohms(value: float) -> str:
    """A resistance [ohm] for people."""
    return format_quantity(value, "resistance")


def amps(value: float) -> str:
    """A current [A] for people."""
    return format_quantity(value, "current")


def volts(value: float) -> str:
    """A voltage [V] for people."""
    return format_quantity(value, "voltage")
