"""What a rule file says about parts, as frozen values. `recognise.rulebook` loads and validates them.

One catalogue, `FIGURES`, names every electrical figure a rule may give; the loader, the JSON Schema for
editors, `rules draft` and the guide are all made from it.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum

from analyzer.evidence import Evidence
from analyzer.quantity import Dimension, Span


class Topology(StrEnum):
    """How a part turns its input into its output, and with it how it makes heat."""

    LINEAR = "linear"
    """Series pass element with a ground pin (bipolar or MOS, positive or negative)."""
    LINEAR_FLOATING = "linear-floating"
    """Three-terminal adjustable: no ground pin, its bias current flows to the load."""
    LINEAR_TWO_SUPPLY = "linear-two-supply"
    """Pass element on one supply, control circuit on a second, higher one."""
    BUCK = "buck"
    BOOST = "boost"
    BUCK_BOOST = "buck-boost"
    INVERTING = "inverting"
    CHARGE_PUMP = "charge-pump"
    MODULE = "module"
    """Closed converter, isolated or not, known by its efficiency only."""
    CONTROLLER = "controller"
    """Drives external transistors: most of the dissipation is outside the part."""
    CHARGER = "charger"
    """Linear battery charger, with or without a power path."""
    SHUNT = "shunt"
    """Shunt regulator, shunt reference or Zener diode behind a resistor."""
    LOAD_SWITCH = "load-switch"
    EFUSE = "efuse"
    IDEAL_DIODE = "ideal-diode"
    POWER_MUX = "power-mux"
    SERIES_DIODE = "series-diode"
    SERIES_TRANSISTOR = "series-transistor"
    """External pass or reverse-protection transistor."""

    @property
    def regulates(self) -> bool:
        """Whether the output voltage is the part's own, not its input less a drop."""
        return self not in PASSAGES


PASSAGES = frozenset(
    {
        Topology.LOAD_SWITCH,
        Topology.EFUSE,
        Topology.IDEAL_DIODE,
        Topology.POWER_MUX,
        Topology.SERIES_DIODE,
        Topology.SERIES_TRANSISTOR,
    }
)
"""Topologies that pass voltage (less a drop) and current instead of regulating."""

LINEARS = frozenset({Topology.LINEAR, Topology.LINEAR_FLOATING, Topology.LINEAR_TWO_SUPPLY})
SWITCHERS = frozenset(
    {
        Topology.BUCK,
        Topology.BOOST,
        Topology.BUCK_BOOST,
        Topology.INVERTING,
        Topology.MODULE,
        Topology.CONTROLLER,
    }
)


class Role(StrEnum):
    """What a pin does for the channel it belongs to."""

    INPUT = "input"
    OUTPUT = "output"
    GROUND = "ground"
    FEEDBACK = "feedback"
    """Compared with the reference: the divider's tap, or the adjust pin of a floating regulator."""
    SENSE = "sense"
    """Reads the output directly; neither a source nor a divider tap."""
    SWITCH = "switch"
    ENABLE = "enable"
    BIAS = "bias"
    """Supplies the control circuit (two-supply parts) or is a bypass pin."""
    BOOTSTRAP = "bootstrap"
    SET = "set"
    """Programs a current or a voltage through a resistor to ground."""
    OTHER = "other"


class BoardClass(StrEnum):
    """Class of the board that a θJA was measured on, or that the design has; worst first."""

    LOW = "1s"
    """One or two layers, no copper at the heat-carrying pin (JESD51-3 low-K)."""
    POUR = "1s+pour"
    """One or two layers with at least 300 mm² of copper on the heat-carrying pin."""
    HIGH = "2s2p"
    """Four or more layers with solid planes (JESD51-7 high-K)."""


@dataclass(frozen=True, slots=True)
class FigureKey:
    """An electrical figure a rule may give.

    Attributes:
        dimension: Its dimension, and so the units its text may have.
        meaning: One line for the guide and the draft rule.
        where: Where data sheets usually state it.
        may_be_curve: Whether a table over the load current is accepted in its place.
    """

    dimension: Dimension
    meaning: str
    where: str
    may_be_curve: bool = False


_D = Dimension
SIGNED_FIGURES = frozenset({"feedback_current", "resistance_tempco", "forward_drop_tempco", "efficiency_hot_loss"})
"""Figures that may be negative."""

SOME_FIGURES = frozenset(
    {"on_resistance", "high_side_resistance", "output_resistance", "switching_frequency", "gain", "control_ratio"}
)
"""Figures of which none would be less than any part has."""


def figure_limits(key: str) -> tuple[float, float, bool]:
    """(least, greatest, whether the least itself is excluded) that a figure can be, in its unit.

    Temperatures have limits of their own.
    """
    if key in ("efficiency", "output_tolerance"):
        # a converter without loss would make no heat at all
        return 0.0, 0.999 if key == "efficiency" else 1.0, key == "efficiency"
    if key == "pass_channels":
        return 1.0, 16.0, False
    return -math.inf if key in SIGNED_FIGURES else 0.0, math.inf, key in SOME_FIGURES


FIGURES: Mapping[str, FigureKey] = {
    # what it does
    "output_tolerance": FigureKey(_D.RATIO, "accuracy of a fixed output, ± fraction", "electrical characteristics"),
    "reference": FigureKey(_D.VOLTAGE, "reference voltage at the feedback pin", "electrical characteristics"),
    "feedback_current": FigureKey(
        _D.CURRENT, "current into the FB pin, or out of the ADJ pin", "electrical characteristics"
    ),
    "set_current": FigureKey(
        _D.CURRENT, "current the SET pin forces through its resistor", "electrical characteristics"
    ),
    "dropout": FigureKey(
        _D.VOLTAGE, "input-output difference at which regulation is lost", "electrical characteristics", True
    ),
    "gain": FigureKey(_D.RATIO, "input multiplier of a charge pump (2 doubles, 1 inverts)", "description"),
    "output_resistance": FigureKey(
        _D.RESISTANCE, "output resistance of an unregulated charge pump", "electrical characteristics"
    ),
    # what it takes
    "quiescent": FigureKey(_D.CURRENT, "input current without load", "electrical characteristics"),
    "ground_current": FigureKey(_D.CURRENT, "ground-pin current under load", "electrical characteristics", True),
    "ground_current_dropout": FigureKey(_D.CURRENT, "ground-pin current in dropout", "ground current figure"),
    "control_current": FigureKey(_D.CURRENT, "current of the control supply pin", "electrical characteristics", True),
    "control_ratio": FigureKey(_D.RATIO, "load current divided by control current", "electrical characteristics"),
    "minimum_load": FigureKey(_D.CURRENT, "least load for regulation", "electrical characteristics"),
    "efficiency": FigureKey(_D.RATIO, "output over input power", "efficiency figure", True),
    "efficiency_output": FigureKey(_D.VOLTAGE, "output voltage the efficiency was measured at", "efficiency figure"),
    "efficiency_temperature": FigureKey(
        _D.TEMPERATURE, "temperature the efficiency was measured at", "efficiency figure"
    ),
    "efficiency_hot_loss": FigureKey(_D.PER_KELVIN, "fall of efficiency per kelvin above that", "application note"),
    # loss terms of a switcher
    "switching_frequency": FigureKey(_D.FREQUENCY, "switching frequency", "electrical characteristics"),
    "high_side_resistance": FigureKey(
        _D.RESISTANCE, "on-resistance of the high-side switch", "electrical characteristics"
    ),
    "low_side_resistance": FigureKey(
        _D.RESISTANCE, "on-resistance of the low-side switch", "electrical characteristics"
    ),
    "saturation_voltage": FigureKey(_D.VOLTAGE, "drop of a bipolar switch", "electrical characteristics"),
    "rise_time": FigureKey(_D.TIME, "rise time of the switch node", "typical characteristics"),
    "fall_time": FigureKey(_D.TIME, "fall time of the switch node", "typical characteristics"),
    "dead_time": FigureKey(_D.TIME, "sum of both dead times of a cycle", "typical characteristics"),
    "body_diode_drop": FigureKey(
        _D.VOLTAGE, "drop of the low-side body diode in the dead time", "electrical characteristics"
    ),
    "gate_charge": FigureKey(_D.CHARGE, "gate charge switched in a cycle", "electrical characteristics"),
    "gate_voltage": FigureKey(_D.VOLTAGE, "gate drive voltage", "block diagram"),
    "boost_current": FigureKey(_D.CURRENT, "average current of the bootstrap pin", "application section"),
    "boost_voltage": FigureKey(_D.VOLTAGE, "bootstrap voltage", "application section"),
    "diode_drop": FigureKey(
        _D.VOLTAGE, "drop of the external rectifier (its heat is outside the part)", "diode data sheet"
    ),
    "inductor_resistance": FigureKey(
        _D.RESISTANCE, "resistance of the inductor (its heat is outside)", "inductor data sheet"
    ),
    "resistance_tempco": FigureKey(
        _D.PER_KELVIN, "rise of on-resistances per kelvin above 25 °C", "on-resistance figure"
    ),
    "drive_fraction": FigureKey(_D.RATIO, "base drive of a charge pump as fraction of the load", "application section"),
    # what it passes
    "on_resistance": FigureKey(
        _D.RESISTANCE, "on-resistance of the pass element at 25 °C", "electrical characteristics"
    ),
    "forward_drop": FigureKey(_D.VOLTAGE, "forward or regulated drop", "electrical characteristics", True),
    "forward_drop_tempco": FigureKey(
        _D.PER_KELVIN, "relative change of the drop per kelvin", "forward characteristics"
    ),
    "reverse_leakage": FigureKey(_D.CURRENT, "reverse leakage at 25 °C", "electrical characteristics"),
    "pass_channels": FigureKey(_D.RATIO, "number of equal switches in the package", "description"),
    "minimum_cathode_current": FigureKey(
        _D.CURRENT, "least current of a shunt regulator", "electrical characteristics"
    ),
    "charge_current": FigureKey(_D.CURRENT, "charge current", "application section"),
    "charge_gain": FigureKey(_D.VOLTAGE, "charge current times programming resistor", "application section"),
    "battery_low": FigureKey(
        _D.VOLTAGE, "battery voltage at which full charge current starts", "electrical characteristics"
    ),
    # ratings
    "input_max": FigureKey(_D.VOLTAGE, "greatest operating input voltage", "recommended operating conditions"),
    "differential_max": FigureKey(_D.VOLTAGE, "greatest input-output difference", "absolute maximum ratings"),
    "input_absolute_max": FigureKey(_D.VOLTAGE, "absolute maximum input voltage", "absolute maximum ratings"),
    "output_current_max": FigureKey(_D.CURRENT, "greatest output current", "recommended operating conditions"),
    "current_limit": FigureKey(_D.CURRENT, "current limit into a short", "electrical characteristics"),
    "junction_max": FigureKey(
        _D.TEMPERATURE, "greatest operating junction temperature", "recommended operating conditions"
    ),
    "junction_absolute_max": FigureKey(
        _D.TEMPERATURE, "absolute maximum junction temperature", "absolute maximum ratings"
    ),
    "power_max": FigureKey(_D.POWER, "package power limit", "absolute maximum ratings"),
}


@dataclass(frozen=True, slots=True)
class Curve:
    """A figure given as a table over one variable; values between points are interpolated, none outside.

    Attributes:
        points: (x, span of the figure), x strictly rising.
        axis: What x is: "load" [A], "copper" [m²] or "air" [m/s].
        evidence: The curve as evidence (its span is the hull of all points).
    """

    points: tuple[tuple[float, Span], ...]
    axis: str
    evidence: Evidence

    @property
    def lowest(self) -> float:
        """Smallest x of the table."""
        return self.points[0][0]

    @property
    def highest(self) -> float:
        """Largest x of the table."""
        return self.points[-1][0]

    def at(self, x: float) -> Span:
        """The figure at `x` by linear interpolation between the two neighbouring points.

        Raises:
            ValueError: If `x` lies outside the table: published tables are not extrapolated.
        """
        if not self.lowest <= x <= self.highest:
            raise ValueError(f"{x:g} lies outside the table ({self.lowest:g} to {self.highest:g})")
        for (x0, low), (x1, high) in zip(self.points, self.points[1:], strict=False):
            if x == x1:
                return high  # by the formula below rounding may put its ends out of order
            if x <= x1:
                share = (x - x0) / (x1 - x0)
                return Span(
                    low.low + share * (high.low - low.low),
                    low.nominal + share * (high.nominal - low.nominal),
                    low.high + share * (high.high - low.high),
                )
        return self.points[-1][1]


@dataclass(frozen=True, slots=True)
class EfficiencyMap:
    """Efficiency over load and input voltage.

    Attributes:
        points: (load [A], input voltage [V], span of the efficiency), a full grid in rising order.
        evidence: The map as evidence.
    """

    points: tuple[tuple[float, float, Span], ...]
    evidence: Evidence


@dataclass(frozen=True, slots=True)
class ThermalFigure:
    """Thermal data of one package.

    Attributes:
        package: Package family as in `rules/packages.toml`.
        source: Document and place.
        verified: False for figures from memory: they cap the grade at presumed.
        theta_ja: Junction to ambient in still air [K/W].
        board: Class of the board it was measured on; None when the source does not say (then high-K is assumed).
        copper: θJA over copper area on the heat-carrying pin.
        air: θJA over air speed.
        theta_jc_top, theta_jc_bottom: Junction to case or tab [K/W].
        psi_jt, psi_jb: Characterisation parameters, for measured temperatures only [K/W].
        foster: (R [K/W], τ [s]) pairs of the junction-to-ambient network.
    """

    package: str
    source: str
    verified: bool = True
    theta_ja: Evidence | None = None
    board: BoardClass | None = None
    copper: Curve | None = None
    air: Curve | None = None
    theta_jc_top: Evidence | None = None
    theta_jc_bottom: Evidence | None = None
    psi_jt: Evidence | None = None
    psi_jb: Evidence | None = None
    foster: tuple[tuple[float, float], ...] = ()


@dataclass(frozen=True, slots=True)
class Pattern:
    """One way a part's name is written.

    Attributes:
        text: Shell-style pattern, upper case, with at most one "{code}" placeholder.
        decode: How the code reads: "volts", "tenths", "hundredths", "table", "adjustable" or "" for no code.
        table: For "table": code → volts.
        codes: If not empty, the only codes accepted (with the decode above).
    """

    text: str
    decode: str = ""
    table: Mapping[str, float] = field(default_factory=dict)
    codes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class ChannelRule:
    """What a rule says of one output of a part; single-output parts have one, named ""."""

    name: str
    topology: Topology
    sign: int
    pins: Mapping[Role, tuple[str, ...]]
    reference_across: str = "lower"
    volts: Evidence | None = None
    figures: Mapping[str, Evidence] = field(default_factory=dict)
    curves: Mapping[str, Curve] = field(default_factory=dict)
    efficiency_map: EfficiencyMap | None = None


@dataclass(frozen=True, slots=True)
class Rule:
    """One entry of a rule file.

    Attributes:
        name: Name of the entry, unique in its file.
        where: File and entry, for reports.
        is_user: True for the user's own files, which beat shipped ones.
        patterns: How its parts are named.
        makers: Accepted letter prefixes; empty accepts any.
        letters: Reference letters the part may have ("U", "IC", "VR", ...).
        channels: Its outputs.
        thermal: Thermal data per package.
        external: What its heat leaves the package for: "inductor", "diode", "transistor".
        verified: False when any figure is from memory: caps the grade at presumed.
        source: Document the figures come from.
    """

    name: str
    where: str
    is_user: bool
    patterns: tuple[Pattern, ...]
    makers: tuple[str, ...]
    letters: tuple[str, ...]
    channels: tuple[ChannelRule, ...]
    thermal: tuple[ThermalFigure, ...] = ()
    external: tuple[str, ...] = ()
    verified: bool = True
    source: str = ""


@dataclass(frozen=True, slots=True)
class LoadRule:
    """Supply currents of a part that is no regulator: per supply-pin name pattern, a current."""

    name: str
    where: str
    is_user: bool
    patterns: tuple[Pattern, ...]
    supplies: tuple[tuple[str, Evidence], ...]


@dataclass(frozen=True, slots=True)
class SupplyRule:
    """A supply that a standard defines, chosen by net name or by setting.

    Attributes:
        name: Name to use in settings ("usb-2.0").
        nets: Shell-style patterns of net names that suggest it; empty when only a setting may choose it.
        volts: Its voltage span with clause and source.
    """

    name: str
    nets: tuple[str, ...]
    volts: Evidence


@dataclass(frozen=True, slots=True)
class PackageRule:
    """A package family: how footprints spell it and its generic, conservative θJA by board class.

    Attributes:
        family: Our name of it ("SOT-223").
        spellings: Shell-style patterns of footprint names, upper case, library nickname removed.
        theta_ja: Generic θJA by board class; empty when none is known (then it is refused, not guessed).
        note: What goes with the figures ("generic, ±40 %").
    """

    family: str
    spellings: tuple[str, ...]
    theta_ja: Mapping[BoardClass, Evidence]
    note: str = ""


@dataclass(frozen=True)
class Rulebook:
    """All rules in force, user rules first."""

    rules: tuple[Rule, ...]
    loads: tuple[LoadRule, ...]
    supplies: tuple[SupplyRule, ...]
    packages: tuple[PackageRule, ...]
    files: tuple[tuple[str, str], ...] = ()
    """(path, sha256) of every rule file read."""
