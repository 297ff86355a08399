"""The circuit, built with skidl: the only package that knows the library."""

from modgen.circuit.build import Built, build
from modgen.circuit.plan import CircuitMismatch

__all__ = ["Built", "CircuitMismatch", "build"]
