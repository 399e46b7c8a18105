"""Recognition by pins: parts that look like a regulator or a passage though no rule knows them.

The patterns and the words that rule a part out were counted over KiCad's own libraries: a linear part shows an input,
an output and a ground or adjust pin; a switcher a switch node, an input and a feedback or output pin.
"""

from __future__ import annotations

import re
from collections.abc import Mapping

from analyzer.circuit import Circuit, Component, Pin, plain_name
from analyzer.component_value import component_value
from analyzer.evidence import Evidence, Grade
from analyzer.part import Channel
from analyzer.quantity import Dimension, Span
from analyzer.recognise import words
from analyzer.recognise.by_rule import DEFAULT_TOLERANCE, letters_of
from analyzer.recognise.identity import identities, looks_like_part_number
from analyzer.recognise.roles import by_role, channel_number
from analyzer.rule import PASSAGES, Role, Topology

MOST_NAMES = 12
"""A linear regulator has at most so many different pin names; more make a mixed-signal part."""
MOST_NAMES_DESCRIBED = 24
"""The same where the description speaks of a linear regulator: duals with supervisors, outputs set by pins."""

LETTERS = frozenset({"U", "IC", "VR", "PS", "REG", "A", "N", "M", "MOD", "PWR", "T", "TR", "Q", "D", "CR"})
_SHUNT_PINS = {
    Role.OUTPUT: ("K", "C", "CATHODE", "CATH"),
    Role.GROUND: ("A", "ANODE"),
    Role.FEEDBACK: ("REF", "R", "ADJ", "FB"),
}
_LINEAR_INPUTS = frozenset("IN VI VIN INPUT VINA VINP +VIN VIN+ I V+ VCC VSUP PVIN".split())
_PLAIN_NAMES = frozenset("VIN VI VIN+ +VIN".split())

_MODULE = re.compile(r"(?<![A-Z])(MODULE|CONV|CONVERTER|DCDC|DC-DC)(?![A-Z])")

_DECIMAL = re.compile(r"(?<![\d.])(\d{1,2}\.\d{1,3})(?![\d.])")
_LETTER = re.compile(r"(?<![\dA-Z])(\d{1,2})V(\d{1,2})(?!\d)")


def channels_of(component: Component, circuit: Circuit | None) -> tuple[tuple[Channel, ...], str]:
    """Channels of a part that looks like a regulator or passage, and why; none if it does not."""
    letters = letters_of(component)
    if letters not in LETTERS:
        return (), ""
    text = f"{component.description} {component.keywords}"
    roles = by_role(component.pins)
    passage = words.passage_of(component.description) or words.passage_of(component.keywords)
    if passage is not None and Role.INPUT in roles and Role.OUTPUT in roles:
        if passage is Topology.LOAD_SWITCH and len({channel_number(pin) for pin in roles[Role.INPUT]} - {""}) > 1:
            # several numbered inputs and one switch: it selects among them
            passage = Topology.POWER_MUX
        return (Channel("", passage, 1, roles),), f"its description says {passage.value}"
    battery = _battery(component.pins)
    if not battery and words.CHARGER.search(component.description) and Role.SWITCH not in roles:
        # a linear charger without a power path may call its battery pin an output
        battery = roles.get(Role.OUTPUT, ())
    if battery and words.CHARGER.search(text) and Role.INPUT in roles:
        pins = {**roles, Role.OUTPUT: battery}
        return (Channel("", Topology.CHARGER, 1, pins),), "its description says charger"
    if words.SHUNT.search(text) and (shunt := _shunt(component.pins)):
        volts = _named_volts(component, 1)
        return (Channel("", Topology.SHUNT, 1, shunt, volts),), "its description says shunt, with anode and cathode"
    if letters in ("Q", "D", "CR"):
        return (), ""
    if words.NOT_A_REGULATOR.search(component.description):
        return (), ""
    return _regulator(component, roles, circuit, text)


def _battery(pins: tuple[Pin, ...]) -> tuple[Pin, ...]:
    return tuple(pin for pin in pins if plain_name(pin.name).upper() in ("VBAT", "BAT", "BATT", "BAT+", "VBATT"))


def _shunt(pins: tuple[Pin, ...]) -> dict[Role, tuple[Pin, ...]]:
    """Roles of a shunt element: its cathode is the output, its anode the ground; {} if it has not both."""
    found: dict[Role, tuple[Pin, ...]] = {}
    for role, names in _SHUNT_PINS.items():
        found[role] = tuple(pin for pin in pins if plain_name(pin.name).upper() in names)
    return {role: members for role, members in found.items() if members} if found[Role.OUTPUT] else {}


def _regulator(
    component: Component, roles: Mapping[Role, tuple[Pin, ...]], circuit: Circuit | None, text: str
) -> tuple[tuple[Channel, ...], str]:
    kind = words.kind_of(component.description) or words.kind_of(component.keywords)
    switches = bool(roles.get(Role.SWITCH)) and bool(roles.get(Role.INPUT) or kind is Topology.BOOST)
    if kind is None and all(pin.kind == "input" for pin in roles.get(Role.SWITCH, ())):
        # inputs called SW are push buttons
        switches = False
    tapped = bool(roles.get(Role.FEEDBACK) or roles.get(Role.SENSE) or roles.get(Role.OUTPUT))
    if switches and tapped:
        topology = kind if kind not in (None, Topology.LINEAR) else _by_inductor(roles, circuit)
        assert topology is not None
        return _split(component, topology, roles, text), "pins: switch node, input and feedback or output"
    output_switch = [
        pin for pin in roles.get(Role.OUTPUT, ()) if pin.kind in ("output", "open_emitter", "open_collector")
    ]
    if output_switch and roles.get(Role.FEEDBACK) and roles.get(Role.INPUT) and kind not in (Topology.LINEAR, None):
        # OUT of an older buck is its switch node: the rail is behind an inductor
        pins = {**roles, Role.SWITCH: tuple(output_switch)}
        pins.pop(Role.OUTPUT)
        return _split(component, kind or Topology.BUCK, pins, text), "pins: switching output, feedback and input"
    if _looks_linear(component, roles) and not roles.get(Role.SWITCH):
        topology = kind if kind in (Topology.CHARGE_PUMP, Topology.MODULE) else Topology.LINEAR
        if _MODULE.search(component.footprint.upper()):
            topology = Topology.MODULE
        if kind in (Topology.BUCK, Topology.BOOST, Topology.BUCK_BOOST, Topology.INVERTING):
            topology = Topology.MODULE
        if topology is Topology.LINEAR and not roles.get(Role.GROUND):
            topology = Topology.LINEAR_FLOATING
        return _split(component, topology, roles, text), "pins: input, output and ground or adjust"
    return (), ""


def _looks_linear(component: Component, roles: Mapping[Role, tuple[Pin, ...]]) -> bool:
    names = {plain_name(pin.name) for pin in component.pins}
    most = MOST_NAMES_DESCRIBED if words.kind_of(component.description) is Topology.LINEAR else MOST_NAMES
    if len(names) > most or not (roles.get(Role.GROUND) or roles.get(Role.FEEDBACK)):
        return False
    inputs = [
        pin for pin in roles.get(Role.INPUT, ()) if plain_name(pin.name).upper().strip("0123456789") in _LINEAR_INPUTS
    ]
    outputs = roles.get(Role.OUTPUT, ())
    if not inputs or not outputs:
        return False
    powers = any(pin.kind == "power_out" for pin in outputs)
    # an adjust pin beside a typed output says enough, whatever the type of the input
    typed = powers and (any(pin.kind == "power_in" for pin in inputs) or bool(roles.get(Role.FEEDBACK)))
    # home-made symbols are badly typed; names that say "voltage in" and "voltage out" speak for themselves
    named = any(plain_name(pin.name).upper() in _PLAIN_NAMES for pin in inputs) and any(
        plain_name(pin.name).upper() in ("VOUT", "VO", "VOUT+", "+VOUT") and pin.kind != "input" for pin in outputs
    )
    return typed or named


def _by_inductor(roles: Mapping[Role, tuple[Pin, ...]], circuit: Circuit | None) -> Topology:
    """Boost if the inductor at the switch node comes from the input, else buck."""
    if circuit is None:
        return Topology.BUCK
    inputs = {pin.net for pin in roles.get(Role.INPUT, ())}
    for pin in roles.get(Role.SWITCH, ()):
        for component, _ in circuit.on_net.get(pin.net, ()):
            others = {other.net for other in component.pins} - {pin.net}
            value = component_value(component.value)
            is_coil = component.ref.startswith("L") or (value is not None and value.dimension is Dimension.INDUCTANCE)
            if is_coil and others & inputs:
                return Topology.BOOST
    return Topology.BUCK


def _split(
    component: Component, topology: Topology, roles: Mapping[Role, tuple[Pin, ...]], text: str
) -> tuple[Channel, ...]:
    """One channel, or one for each number behind the feedback, switch or output pins of a part with several outputs."""
    telling = Role.SWITCH if roles.get(Role.SWITCH) else Role.OUTPUT
    numbers: dict[str, set[str]] = {}
    for pin in roles.get(telling, ()):
        numbers.setdefault(channel_number(pin), set()).add(pin.net)
    separate = [number for number in numbers if number]
    taps = {channel_number(pin) for pin in (*roles.get(Role.FEEDBACK, ()), *roles.get(Role.SENSE, ()))}
    is_multi = len(separate) > 1 and topology is not Topology.BUCK_BOOST and (telling is Role.OUTPUT or len(taps) > 1)
    if not is_multi or len(set(map(frozenset, numbers.values()))) < 2:
        return (_channel(component, "", topology, roles, text),)
    return tuple(_channel(component, number, topology, _own(roles, number), "") for number in sorted(separate))


def _own(roles: Mapping[Role, tuple[Pin, ...]], number: str) -> dict[Role, tuple[Pin, ...]]:
    found = {}
    for role, pins in roles.items():
        mine = tuple(pin for pin in pins if channel_number(pin) == number)
        common = tuple(pin for pin in pins if not channel_number(pin))
        if mine or common:
            found[role] = mine or common
    return found


def _channel(
    component: Component, name: str, topology: Topology, roles: Mapping[Role, tuple[Pin, ...]], text: str
) -> Channel:
    sign = -1 if words.NEGATIVE.search(component.description) and topology is not Topology.MODULE else 1
    # the second number in a module's name may be its current
    adjustable = bool(roles.get(Role.FEEDBACK)) or topology in PASSAGES or topology is Topology.MODULE
    volts = None if adjustable or name or not text else _named_volts(component, sign)
    return Channel(name, topology, sign, roles, volts)


def _named_volts(component: Component, sign: int) -> Evidence | None:
    """A voltage written with a decimal in the part's name is safe (KiCad's libraries: no counter-example)."""
    for identity in identities(component):
        found = _DECIMAL.search(identity.text) or _LETTER.search(identity.text)
        if found:
            value = float(".".join(found.groups()))
            note = f"accuracy not given: ±{DEFAULT_TOLERANCE:.0%} presumed, common practice"
            span = Span.around(value * sign, DEFAULT_TOLERANCE)
            source = f"{component.ref} {identity.field} {identity.text}"
            return Evidence("output voltage", span, "V", source, Grade.PRESUMED, note=note)
        if looks_like_part_number(identity.text):
            # the part's own number says nothing; the symbol may have been copied from another part
            return None
    return None
