"""A circuit as parts and nets, whoever made it, and the reader of netlist files."""

from modgen.netlist.model import Net, Netlist, Part
from modgen.netlist.reader import parse_netlist, read_netlist

__all__ = ["Net", "Netlist", "Part", "parse_netlist", "read_netlist"]
