"""Small circuits, parts and rails put together by hand, for the tests of the draws stage."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace

from analyzer.circuit import Circuit, Component, Net, Note, Pin, Place
from analyzer.draws import find_loads
from analyzer.evidence import Evidence, Grade
from analyzer.load import Loads
from analyzer.part import Channel, Package, Part
from analyzer.quantity import Span
from analyzer.rail import Feed, Rail, Rails, Wiring
from analyzer.rule import Role, Rulebook, Topology
from analyzer.settings import Settings, StatedDraw

SHEET = Place("board.kicad_sch", "/", 0.0, 0.0)
RULES = Rulebook((), (), (), ())


def evidence(value: float | Span, unit: str = "A", grade: Grade = Grade.STATED, quantity: str = "test") -> Evidence:
    span = value if isinstance(value, Span) else Span.exact(value)
    return Evidence(quantity, span, unit, "test", grade)


def part(
    ref: str,
    pins: Iterable[tuple[str, ...]],
    value: str = "",
    lib: str = "",
    fields: dict[str, str] | None = None,
    fitted: bool = True,
    place: Place = SHEET,
    description: str = "",
) -> Component:
    """A component; pins are (number, name, kind, net), or (net, net) for a passive two-terminal part."""
    rows = [(str(n), "~", "passive", row) if isinstance(row, str) else row for n, row in enumerate(pins, 1)]
    return Component(
        key=f"/{ref}",
        ref=ref,
        value=value,
        lib_id=lib or f"Device:{ref[0]}",
        footprint="",
        fields=fields or {},
        description=description,
        keywords="",
        pins=tuple(Pin(*row) for row in rows),
        place=place,
        fitted=fitted,
    )


def chip(ref: str, supply: str, *more: str, kind: str = "power_in", **options: object) -> Component:
    """A chip with a supply pin on each named net, and ground."""
    pins = [(str(n), f"VDD{n}", kind, net) for n, net in enumerate((supply, *more), 1)]
    return part(ref, [*pins, ("99", "GND", "power_in", "GND")], lib="Chips:Chip", **options)  # type: ignore[arg-type]


def circuit(*components: Component, notes: Iterable[Note] = ()) -> Circuit:
    nets: dict[str, list[tuple[str, str]]] = {}
    for component in components:
        for pin in component.pins:
            nets.setdefault(pin.net, []).append((component.key, pin.number))
    return Circuit(
        "test",
        tuple(components),
        tuple(Net(name, tuple(pins), not name.startswith("Net-")) for name, pins in sorted(nets.items())),
        notes=tuple(notes),
    )


def regulator(component: Component, topology: Topology = Topology.LINEAR, **figures: float | Span) -> Part:
    """The component as a recognised one-channel regulator; its pins are told apart by their names."""
    roles = {"VIN": Role.INPUT, "VOUT": Role.OUTPUT, "GND": Role.GROUND, "FB": Role.FEEDBACK}
    pins: dict[Role, tuple[Pin, ...]] = {}
    for pin in component.pins:
        role = roles.get(pin.name, Role.OTHER)
        pins[role] = (*pins.get(role, ()), pin)
    channel = Channel("", topology, 1, pins, figures={key: evidence(value) for key, value in figures.items()})
    return Part(component, "rule", None, "Value", component.value, Package(None, ""), (channel,))


def vreg(ref: str, vin: str, vout: str) -> Component:
    return part(
        ref,
        [("1", "VIN", "power_in", vin), ("2", "GND", "power_in", "GND"), ("3", "VOUT", "power_out", vout)],
        value="REG",
        lib="Regs:Reg",
    )


def rails(
    volts: dict[str, float | Span | None],
    wirings: Iterable[Wiring] = (),
    nets: dict[str, tuple[str, ...]] | None = None,
) -> Rails:
    """Rails by voltage, ground among them, fed by the wirings; rails that no wiring feeds come from outside."""
    wirings = tuple(wirings)
    found = [Rail("GND", ("GND",), evidence(0.0, "V"), is_ground=True)]
    for name, value in volts.items():
        feeds = [
            Feed(w.part.ref, "regulator" if w.channel.topology.regulates else "passage", w.channel.name, w.input_rail)
            for w in wirings
            if w.output_rail == name
        ]
        known = None if value is None else evidence(value, "V", Grade.DERIVED)
        outside = () if feeds else (Feed("", "supply"),)
        found.append(Rail(name, (nets or {}).get(name, (name,)), known, (*feeds, *outside)))
    of_net = {net: rail.name for rail in found for net in rail.nets}
    return Rails(tuple(found), wirings, of_net=of_net)


def wire(
    component: Component, above: str | None, below: str | None, topology: Topology = Topology.LINEAR, **figures: float
) -> Wiring:
    known = regulator(component, topology, **figures)
    return Wiring(known, known.channels[0], above, above, below, below, "GND")


def linear(ground: float = 0.0) -> Callable[[Wiring, Span], Evidence | None]:
    """Input current of a linear part: load and ground current."""
    return lambda wiring, load: evidence(load + Span.exact(ground), quantity=f"input current of {wiring.part.ref}")


def loads(
    board: Circuit,
    known: Rails,
    settings: Settings | None = None,
    rulebook: Rulebook = RULES,
    takes: Callable[[Wiring, Span], Evidence | None] | None = None,
) -> Loads:
    parts = tuple({wiring.part.key: wiring.part for wiring in known.wirings}.values())
    return find_loads(board, parts, known, settings or Settings(), rulebook, takes or linear())


def names(found):
    return [finding.name for finding in found.findings]


def stated(ref, amps=None, rail="", watts=None, source="heatledger.toml [draws]"):
    def known(value, unit):
        return None if value is None else replace(evidence(value, unit), source=source)

    return StatedDraw(ref, rail, known(amps, "A"), known(watts, "W"))


def one_regulator(*more, volts=3.3, **figures):
    """U1 makes +3V3 from +5V; further parts hang on the rails."""
    u1 = vreg("U1", "+5V", "+3V3")
    return circuit(u1, *more), rails({"+5V": 5.0, "+3V3": volts}, [wire(u1, "+5V", "+3V3", **figures)])
