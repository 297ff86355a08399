"""From a spec to a design: sizing, the choice of parts, references and nets."""

from __future__ import annotations

from typing import TypeVar

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Capacitor, Header, Jack, Switch
from modgen.design import practice
from modgen.design.choose import Outcome, choose
from modgen.design.model import Design, Values
from modgen.design.place import place
from modgen.design.reasons import choices, role_reasons
from modgen.design.supply import Ends, capacitor_for, price_at
from modgen.problems import InputError, Problem
from modgen.spec.model import Spec
from modgen.units import format_quantity

__all__ = ["Design", "make_design"]

_T = TypeVar("_T", Jack, Header, Switch)


def make_design(spec: Spec, catalogue: Catalogue) -> Design:
    """Compute a module.

    Parameters
    ----------
    spec : Spec
        What is asked for. [-]
    catalogue : Catalogue
        What can be bought. [-]

    Returns
    -------
    Design
        Every part with its nets, and every choice with its reason. [-]

    Raises
    ------
    InputError
        Nothing in the catalogue meets the spec; the problems say what blocks and what can be had.
    """
    outcome = choose(spec, catalogue)
    values = _values(spec, catalogue, outcome)
    jack = _cheapest(spec, catalogue, Jack)
    header = _cheapest(spec, catalogue, Header)
    decided = choices(spec, outcome, values, catalogue)
    parts = place(spec, values, jack, header, role_reasons(decided))
    return Design(spec.module, spec.channels, values, parts, decided)


def _values(spec: Spec, catalogue: Catalogue, outcome: Outcome) -> Values:
    stage, network = outcome.best.stage, outcome.best.network
    rail = Ends.of(spec.rails).greatest
    packages = len(stage.packages)
    mounted = [c for c in catalogue.of(Capacitor) if c.mount == spec.build.mount]
    rails, boards = 1 if spec.rails.single else 2, spec.order.boards
    least = practice.RESERVOIR * (1 + packages // practice.RESERVOIR_PACKAGES)
    reservoir = capacitor_for(
        [c for c in mounted if c.dielectric == "electrolytic"], least, 10 * least, rail, rails * boards
    )
    decoupling = capacitor_for(
        [c for c in mounted if c.dielectric == "x7r"],
        practice.DECOUPLING * (1 - 1e-9),
        practice.DECOUPLING * (1 + 1e-9),
        rail,
        packages * rails * boards,
    )
    missing = [name for name, part in (("reservoir", reservoir), ("decoupling capacitor", decoupling)) if part is None]
    if reservoir is None or decoupling is None:
        raise InputError(
            [
                Problem(
                    spec.place("rails"),
                    f"the catalogue has no {name} for {spec.build.mount} mounting that stands {rail:.4g} V",
                    "its rating, derated, must cover the rail at the high end of its tolerance",
                    "add one with build.catalogue",
                )
                for name in missing
            ]
        )
    switched = network.capacitor.switched
    beside = network.capacitor.parts[1] if len(network.capacitor.parts) == 2 else None
    return Values(
        amplifier=stage.type,
        packages=stage.packages,
        terminator=stage.terminator,
        input_series=stage.input_series,
        isolating=network.isolating,
        control=network.control,
        glide=network.capacitor.parts[0],
        back_to_back=network.capacitor.back_to_back,
        output_series=stage.output.series,
        inside_loop=stage.output.inside,
        feedback=stage.output.feedback,
        compensation=stage.output.compensation,
        diode=stage.diode,
        reservoir=reservoir,
        decoupling=decoupling,
        idle_tie=stage.idle_tie,
        glide_parallel=beside if not network.capacitor.back_to_back and not switched else None,
        range_capacitor=beside if switched else None,
        # a step over the whole span stands across its open contact, as it does across the control
        range_switch=_cheapest(spec, catalogue, Switch, spec.signal.high - spec.signal.low) if switched else None,
        # what limits the current into an input limits it into the waiting capacitor as well
        range_keeper=stage.input_series if switched else None,
    )


def _cheapest(spec: Spec, catalogue: Catalogue, kind: type[_T], voltage: float = 0.0) -> _T:
    """The cheapest socket, header or switch of a voltage [V]; through-hole parts whatever the rest is."""
    fit = [part for part in catalogue.of(kind) if part.voltage >= voltage]
    if not fit:
        rated = f" for {format_quantity(voltage, 'voltage')}" if voltage else ""
        raise InputError(
            [
                Problem(
                    spec.place("build"),
                    f"the catalogue has no {kind.__name__.lower()}{rated}",
                    "",
                    "add one with build.catalogue",
                )
            ]
        )
    return min(fit, key=lambda part: (price_at(part, spec.order.boards), part.key))
