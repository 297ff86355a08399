"""What may stand in the glide position: one capacitor, two in parallel, or two polarised ones back to back."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations_with_replacement, product

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Capacitor
from modgen.design import practice
from modgen.design.supply import Ends, price_at
from modgen.spec.model import Spec


@dataclass(frozen=True)
class Arrangement:
    """A glide capacitor of one or two parts; back to back they make half the capacitance, in parallel the sum."""

    parts: tuple[Capacitor, ...]
    back_to_back: bool = False
    #: the second part is switched in beside the first for the slow range
    switched: bool = False

    @property
    def key(self) -> tuple[str, ...]:
        """The parts' names."""
        return tuple(part.key for part in self.parts)

    @property
    def capacitance(self) -> float:
        """What the control sees [F]."""
        total = sum(part.capacitance for part in self.parts)
        return total / 4 if self.back_to_back else total

    @property
    def tolerance(self) -> float:
        """Of the whole, when every part is off the same way [-]."""
        total = sum(part.capacitance for part in self.parts)
        return sum(part.capacitance * part.tolerance for part in self.parts) / total

    @property
    def fast(self) -> Arrangement:
        """What is there in the fast range: the first part of a switched pair, else the whole."""
        return Arrangement(self.parts[:1]) if self.switched else self

    @property
    def leaky(self) -> bool:
        """Whether its leakage is a current rather than an insulation resistance."""
        return self.parts[0].dielectric in practice.GLIDE_LEAKY

    def insulation(self, voltage: float) -> float:
        """Least insulation resistance of the whole at a voltage; infinite for what leaks by current [ohm]."""
        if self.leaky:
            return float("inf")
        return 1 / sum(1 / part.insulation(voltage) for part in self.parts)

    def leakage(self, voltage: float) -> float:
        """Greatest leakage current of what leaks by current, else 0 [A]."""
        return self.parts[0].leakage(voltage) if self.leaky else 0.0

    def cost(self, lanes: int) -> float:
        """Price of one channel's parts when parts for so many channels are bought."""
        if len(set(self.parts)) == 1:
            return len(self.parts) * price_at(self.parts[0], len(self.parts) * lanes)
        return sum(price_at(part, lanes) for part in self.parts)

    @property
    def area(self) -> float:
        """Board area [m^2]."""
        return sum(part.body.area for part in self.parts)


def arrangements(spec: Spec, catalogue: Catalogue) -> tuple[list[Arrangement], dict[str, str]]:
    """Capacitors that may stand alone or back to back, and why the others may not (dielectric -> reason)."""
    asked = spec.build.capacitor
    bipolar = spec.signal.low < 0
    voltage = Ends.of(spec.rails).greatest
    found: list[Arrangement] = []
    refused: dict[str, str] = {}
    for part in catalogue.of(Capacitor):
        if part.mount != spec.build.mount:
            continue
        if asked != "auto" and asked not in (part.family, part.dielectric):
            continue
        if part.dielectric not in practice.GLIDE_DIELECTRICS + practice.GLIDE_LEAKY:
            refused[part.dielectric] = "is piezoelectric, and its capacitance changes with the voltage on it"
        elif part.dielectric in practice.GLIDE_LEAKY and spec.signal.pitch:
            refused[part.dielectric] = "leaks tens to hundreds of cents through the control"
        elif part.voltage * part.derating < voltage:
            refused.setdefault(
                part.dielectric, f"at {part.derating:.0%} of its rating does not stand the {voltage:.4g} V of the rail"
            )
        elif part.polarised and bipolar:
            found.append(Arrangement((part, part), back_to_back=True))
        else:
            found.append(Arrangement((part,)))
    stated = {a.parts[0].dielectric for a in found}
    return found, {name: reason for name, reason in refused.items() if name not in stated}


def pairs(singles: Sequence[Arrangement]) -> Iterator[Arrangement]:
    """Two insulating capacitors in parallel, in every combination; a pair of leaking ones only leaks more."""
    parts = [a.parts[0] for a in singles if not a.leaky]
    for one, two in combinations_with_replacement(parts, 2):
        yield Arrangement((one, two))


def switched(singles: Sequence[Arrangement]) -> Iterator[Arrangement]:
    """An insulating capacitor for the fast range and a larger one that the switch adds for the slow range."""
    parts = [a.parts[0] for a in singles if not a.leaky]
    for fast, slow in product(parts, parts):
        if slow.capacitance > fast.capacitance:
            yield Arrangement((fast, slow), switched=True)
