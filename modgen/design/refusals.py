"""When nothing fits: which bound blocks, the nearest that can be had, and what to change."""

from __future__ import annotations

import difflib
import math
from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Amplifier, Capacitor
from modgen.design.network import Grid, Reach, Room
from modgen.formulas.pitch import scale_to_cents as cents
from modgen.problems import InputError, Problem
from modgen.spec.model import Spec
from modgen.units import format_quantity


def refusal(spec: Spec, key: str, what: str, why: str, fix: str) -> InputError:
    """One problem at a key of the spec."""
    return InputError([Problem(spec.place(key), what, why, fix)])


def _hint(name: str, known: Iterable[str]) -> str:
    near = difflib.get_close_matches(name, sorted(known), 1)
    return f"did you mean '{near[0]}'? " if near else ""


def _list(heading: str, reasons: Sequence[tuple[str, str]]) -> str:
    """A heading and one reason a line, set under the message's own indent."""
    lines = [f"{name}: {reason}" for name, reason in reasons]
    return lines[0] if len(lines) == 1 else "\n         ".join([f"{heading}:", *lines])


def unknown_amplifier(spec: Spec, known: Iterable[str]) -> InputError:
    """The asked type is not in the catalogue."""
    asked = spec.build.amplifier
    fix = f"{_hint(asked, known)}`modgen catalogue amplifier` lists them; build.catalogue adds a file of your own"
    return refusal(spec, "build.amplifier", f"amplifier '{asked}' is not in the catalogue", "", fix)


def wrong_mount(spec: Spec, forms: Iterable[Amplifier]) -> InputError:
    """The asked type is not sold for the asked mounting."""
    return refusal(
        spec,
        "build.amplifier",
        f"amplifier '{spec.build.amplifier}' is not sold for {spec.build.mount} mounting",
        "its forms in the catalogue are " + ", ".join(sorted(a.key for a in forms)),
        "choose another type, or the other mount",
    )


def no_control(spec: Spec, why: str) -> InputError:
    """No control has the taper, or none stands the step."""
    fix = "ask for another taper, a smaller span, or add a control with build.catalogue"
    return refusal(spec, "glide.taper", "no control can be used", why, fix)


def no_capacitor(spec: Spec, catalogue: Catalogue, refused: dict[str, str]) -> InputError:
    """No capacitor may stand in the glide position."""
    asked = spec.build.capacitor
    names = {c.family for c in catalogue.of(Capacitor)} | {c.dielectric for c in catalogue.of(Capacitor)}
    if asked != "auto" and asked not in names:
        fix = f"{_hint(asked, names)}the families are {', '.join(sorted(names))}"
        return refusal(spec, "build.capacitor", f"capacitor family '{asked}' is not in the catalogue", "", fix)
    kind = "capacitor" if asked == "auto" else asked
    what = f"no {kind} in the catalogue can be the glide capacitor"
    why = _list("those there are cannot stand there", sorted(refused.items()))
    why = why if refused else f"none is made for {spec.build.mount} mounting"
    return refusal(spec, "build.capacitor", what, why, "leave build.capacitor at auto, or name a film or C0G family")


def network_fault(grid: Grid | None, room: Room) -> str:
    """Why no network suits one amplifier type; without a grid there was no capacitor to look at."""
    if grid is None or not (able := grid.isolating >= room.isolating).any():
        return "no capacitor and control in the catalogue span the glide range with it"
    offset = float((grid.leak + room.bias * grid.through)[able].min())
    if offset > room.offset:
        return (
            f"its bias of up to {format_quantity(room.bias, 'current')} and the capacitor's leakage through the "
            f"control are an offset of {format_quantity(offset, 'voltage')} at least; "
            f"{format_quantity(max(room.offset, 0.0), 'voltage')} of the budget are left"
        )
    return (
        f"the capacitor's insulation costs {cents(float(grid.scale[able].min())):.3g} cents per octave at least; "
        f"{cents(max(room.scale, 0.0)):.3g} of the budget are left"
    )


def no_amplifier(spec: Spec, refused: Sequence[tuple[str, str]], fits: Callable[[Spec], bool]) -> InputError:
    """No type can do it, whatever the glide network; ``fits`` tells whether some type can do another spec."""
    named = spec.build.amplifier != "auto"
    what = (
        f"amplifier '{spec.build.amplifier}' does not work in this module"
        if named
        else "no amplifier in the catalogue works on these rails with this signal"
    )
    span = _widest_span(spec, fits)
    key = "build.amplifier" if named else "rails"
    if span and not named:
        key = "signal.span" if "signal.span" in dict(spec.places) else key
    fix = (
        f"a span of {span} can be had here; or change " if span else "change the signal's span, the accuracy budget, "
    ) + "the rails or the amplifier"
    return refusal(spec, key, what, _list("every type is refused", refused), fix)


def _widest_span(spec: Spec, fits: Callable[[Spec], bool]) -> str:
    """The widest span of the same shape that some amplifier can do, in steps of a twentieth; empty when none."""
    for twentieths in range(19, 3, -1):
        # two figures, downwards: it must still fit as it is written
        low, high = (_down(end * twentieths / 20) for end in (spec.signal.low, spec.signal.high))
        if high > low and fits(replace(spec, signal=replace(spec.signal, low=low, high=high))):
            return f"±{high:g} V" if low == -high else f"{low:g} V to {high:g} V"
    return ""


def _down(value: float) -> float:
    return math.trunc(value * 10) / 10


def no_network(spec: Spec, reach: Reach, room: Room, refused: Sequence[tuple[str, str]], switch: bool) -> InputError:
    """Some type would do, but no network reaches the range or keeps the budgets with it.

    ``switch`` tells whether a range switch would; it is offered, never added unasked.
    """
    offer = "; or have a panel switch for two ranges, glide: {ranges: 2}" if switch else ""
    glide = spec.glide
    ranges = []
    if reach.longest > glide.shortest:
        ranges.append(f"{_time(glide.shortest)} to {_time(reach.longest)}")
    if reach.shortest < glide.longest:
        ranges.append(f"{_time(reach.shortest)} to {_time(glide.longest)}")
    near = f"the nearest that can be had: {' or '.join(ranges)}" if ranges else ""
    if reach.in_range:
        stated = dict(spec.places)
        key = next((k for k in ("accuracy", "build.capacitor", "build.amplifier") if k in stated), "glide.longest")
        return refusal(
            spec,
            key,
            "the accuracy budget cannot be kept over the glide range",
            _list("every type is refused", refused) + (f"\n         {near}" if near else ""),
            "allow more error, ask for a range that can be had, or another amplifier or capacitor" + offer,
        )
    if not reach.longest and reach.shortest == math.inf:
        needed = format_quantity(room.isolating, "resistance")
        blocks = (
            f"what the amplifier can drive asks for an isolating resistor of {needed} at least, and with that "
            "neither end can be reached"
        )
    elif not reach.longest:
        blocks = "the shortest glide blocks: no capacitor is small enough for any control and resistor"
    elif reach.shortest == math.inf:
        blocks = "the longest glide blocks: no capacitor is large enough for any control"
    else:
        blocks = (
            "the two together block: the range of one control goes from what is left at its end and the isolating "
            f"resistor ({format_quantity(room.isolating, 'resistance')} at least, for the driving amplifier) "
            "to its total"
        )
    cover = "guaranteed over tolerance" if glide.cover == "worst-case" else "nominally"
    asked = f"{_time(glide.shortest)} to {_time(glide.longest)}"
    return refusal(
        spec,
        "glide.longest",
        f"a glide of {asked} ({glide.measure}) cannot be had {cover} from the catalogue",
        f"{blocks}; {near}" if near else blocks,
        "change glide.shortest or glide.longest to a range that can be had, or add parts with build.catalogue" + offer,
    )


def _time(value: float) -> str:
    return format_quantity(value, "time")
