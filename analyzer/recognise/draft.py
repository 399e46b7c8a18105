"""Rules to fill in, for parts that no rule knows or whose rule has no thermal data for their package.

A draft is a valid rule file as it stands: what is not known stands in it as a comment, with what it means and where a
data sheet states it.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from analyzer.circuit import Circuit, Component, plain_name
from analyzer.evidence import Evidence
from analyzer.findings.base import Finding
from analyzer.findings.recognition import SOUNDS_LIKE
from analyzer.part import Channel, Part
from analyzer.quantity import Dimension
from analyzer.recognise.identity import identities, looks_like_part_number
from analyzer.rule import FIGURES, LINEARS, PASSAGES, Curve, Role, Topology

HEAD = """\
# Rules to fill in. Remove the '#' before a line once you have its figure, and write where it comes from in 'source'.
# Values are text with units: "3.3 V", typical and maximum "1.1/1.3 V", a range "5..10 mA", a tolerance "3.3 V ±2 %".
# 'heatledger rules check FILE' lists everything that is wrong with it; 'rules/README.md' explains each key.
"""

_RATINGS = ("input_max", "input_absolute_max", "output_current_max", "junction_max", "junction_absolute_max")
_LINEAR = ("output_tolerance", "reference", "feedback_current", "dropout", "quiescent", "ground_current")
_SWITCHING = ("output_tolerance", "reference", "quiescent", "efficiency", "switching_frequency")
_TERMS = ("high_side_resistance", "low_side_resistance", "saturation_voltage", "rise_time", "fall_time")

ASKED: Mapping[Topology, tuple[str, ...]] = {
    **dict.fromkeys(LINEARS, (*_LINEAR, "minimum_load", *_RATINGS)),
    **dict.fromkeys(PASSAGES, ("on_resistance", "forward_drop", "quiescent", *_RATINGS)),
    Topology.BUCK: (*_SWITCHING, *_TERMS, *_RATINGS),
    Topology.BOOST: (*_SWITCHING, *_TERMS, *_RATINGS),
    Topology.BUCK_BOOST: (*_SWITCHING, *_RATINGS),
    Topology.INVERTING: (*_SWITCHING, *_RATINGS),
    Topology.MODULE: ("output_tolerance", "reference", "efficiency", *_RATINGS),
    Topology.CONTROLLER: ("reference", "quiescent", "efficiency", "switching_frequency", "gate_charge", "gate_voltage"),
    Topology.CHARGE_PUMP: ("output_tolerance", "gain", "quiescent", "output_resistance", *_RATINGS),
    Topology.CHARGER: ("charge_current", "charge_gain", "battery_low", "quiescent", *_RATINGS),
    Topology.SHUNT: ("output_tolerance", "reference", "minimum_cathode_current", "junction_max", "power_max"),
}
"""Figures a draft asks for, by topology."""


def draft(circuit: Circuit, parts: Iterable[Part], findings: Iterable[Finding]) -> str:
    """A rule file to fill in, one entry for each different part."""
    entries: dict[str, list[str]] = {}
    refs: dict[str, list[str]] = {}
    for part in parts:
        if part.rule is not None and part.thermal:
            continue
        name = part.identity if part.rule is not None else part_name(part.component)
        key = f"{name} {part.package.family or ''}"
        refs.setdefault(key, []).append(part.ref)
        entries.setdefault(key, _entry(part, name))
    silent = {finding.key for finding in findings if finding.name == SOUNDS_LIKE.name}
    for component in circuit.components:
        if component.key in silent:
            name = part_name(component)
            refs.setdefault(name, []).append(component.ref)
            entries.setdefault(name, _silent(component, name))
    if not entries:
        return f"# {circuit.board}: every part found has a rule with thermal data for its package.\n"
    text = [HEAD]
    for key, lines in entries.items():
        text.append(f"# {', '.join(refs[key])}\n" + "\n".join(lines) + "\n")
    return "\n".join(text)


def part_name(component: Component) -> str:
    """The best name of a part: its part number, else its value, else its symbol's name."""
    names = list(identities(component))
    best = next((one for one in names if looks_like_part_number(one.text)), names[0] if names else None)
    return best.text if best else component.ref


def _entry(part: Part, name: str) -> list[str]:
    first = part.channels[0]
    lines = [
        "[[rule]]",
        f"name = {quoted(name)}",
        f"kind = {quoted(first.topology.value)}" + ("" if part.rule else f"  # guessed: {_one_line(part.evidence)}"),
    ]
    if first.sign < 0:
        lines.append('sign = "negative"')
    lines.append(f"match = [{{ pattern = {quoted(_pattern(name))} }}]")
    if first.volts is not None and part.rule is not None:
        lines.append(f"volts = {quoted(_value(first.volts))}")
    elif first.topology.regulates and not first.pins.get(Role.FEEDBACK):
        seen = f'"{first.volts.span.nominal:g} V"' if first.volts else '""'
        lines.append(f"# volts = {seen}  # output voltage, if this part has only one")
    lines += _pins(part.channels)
    if first.reference_across != "lower":
        lines.append(f"reference_across = {quoted(first.reference_across)}")
    lines += _figures(first)
    lines.append(
        f"source = {quoted(part.rule.source)}" if part.rule and part.rule.source else '# source = ""  # document, page'
    )
    if part.rule and not part.rule.verified:
        lines.append("verified = false")
    return [*lines, "", *_thermal(part)]


def _pins(channels: tuple[Channel, ...]) -> list[str]:
    lines = ["# pins found:"]
    for channel in channels:
        head = f"#   output {channel.name}: " if channel.name else "#   "
        found = (
            f"{role.value} = {' '.join(_pin(pin.number, pin.name) for pin in pins)}"
            for role, pins in channel.pins.items()
            if role is not Role.OTHER
        )
        lines.append(head + ", ".join(found))
    if len(channels) > 1:
        lines.append("# several outputs: give each a [[rule.channel]] with name, kind, pins and its own figures")
    return lines


def _pin(number: str, name: str) -> str:
    return f"{number}:{_one_line(plain_name(name))}" if name else number


def _figures(channel: Channel) -> list[str]:
    lines = []
    for key in dict.fromkeys((*channel.figures, *channel.curves, *ASKED[channel.topology])):
        figure = FIGURES[key]
        if key in channel.curves:
            lines.append(f"{key} = {_curve(channel.curves[key])}")
        elif key in channel.figures:
            lines.append(f"{key} = {quoted(_value(channel.figures[key]))}")
        else:
            over = "; may be a table over load" if figure.may_be_curve else ""
            lines.append(f'# {key} = ""  # {figure.meaning}{over} (data sheet: {figure.where})')
    return lines


def _thermal(part: Part) -> list[str]:
    package = part.package
    family = package.family or ""
    doubt = "" if family else f"  # footprint '{_one_line(package.text)}' not understood: name its family"
    lines = ["# [[rule.thermal]]", f"# package = {quoted(family)}{doubt}"]
    lines.append('# theta_ja = ""  # junction to ambient, still air (data sheet: thermal information)')
    lines.append('# board = "2s2p"  # board it was measured on: "1s", "1s+pour" or "2s2p"')
    lines.append('# theta_jc_bottom = ""  # junction to case or tab (data sheet: thermal information)')
    lines.append('# source = ""')
    return lines


def _silent(component: Component, name: str) -> list[str]:
    """A part that only its description calls a regulator: everything about it is for a person to say."""
    lines = [f"# {_one_line(component.value)}: {_one_line(component.description)}", "# pins drawn:"]
    lines += [f"#   {_pin(pin.number, pin.name)} ({pin.kind})" for pin in component.pins]
    lines += ["# [[rule]]", f"# name = {quoted(name)}", '# kind = ""', f"# match = [{{ pattern = {quoted(name)} }}]"]
    return [*lines, "# pins = { input = [], output = [], ground = [] }"]


def _pattern(name: str) -> str:
    return "".join("?" if char in "*?{}[]" else char for char in name)[:80]


def _value(evidence: Evidence) -> str:
    """A span in the grammar of rule files, nothing lost."""
    low, nominal, high = evidence.span.corners
    unit = "" if evidence.unit == Dimension.RATIO.value else f" {evidence.unit}"
    if evidence.span.is_exact:
        return f"{nominal!r}{unit}"
    return f"{low!r}/{nominal!r}/{high!r}{unit}"


def _curve(curve: Curve) -> str:
    unit = curve.evidence.unit
    rows = []
    for x, span in curve.points:
        point = Evidence("", span, unit, "", curve.evidence.grade)
        rows.append(f'["{x!r} A", {quoted(_value(point))}]')
    return f"[{', '.join(rows)}]"


def _one_line(text: str) -> str:
    return " ".join("".join(char if char.isprintable() else " " for char in text).split())


def quoted(text: str) -> str:
    """A text as a TOML basic string."""
    plain = _one_line(text).replace("\\", "\\\\").replace('"', '\\"')
    return f'"{plain}"'
