"""Whether a netlist that came back is still the one that the spec asks for."""
