"""The version, where every layer can see it."""

from __future__ import annotations

__version__ = "0.1.0"
