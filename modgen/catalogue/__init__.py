"""What can be bought: typed records read from YAML, each figure with where it comes from."""

from modgen.catalogue.listing import describe
from modgen.catalogue.records import (
    Amplifier,
    Body,
    Capacitor,
    Control,
    Diode,
    Evidence,
    Header,
    Jack,
    Part,
    PinDef,
    PriceBreak,
    Resistor,
    Switch,
)
from modgen.catalogue.shelf import Catalogue, load_catalogue
from modgen.catalogue.tables import read_prices, read_stock

__all__ = [
    "Amplifier",
    "Body",
    "Capacitor",
    "Catalogue",
    "Control",
    "Diode",
    "Evidence",
    "Header",
    "Jack",
    "Part",
    "PinDef",
    "PriceBreak",
    "Resistor",
    "Switch",
    "describe",
    "load_catalogue",
    "read_prices",
    "read_stock",
]
