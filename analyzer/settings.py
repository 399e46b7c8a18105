"""Settings: what a person states about a board in `heatledger.toml`, as frozen values.

`analyzer.settings_file` reads the file; this module only says what there is and what the defaults are.
Every number is evidence: a default is graded presumed and says so, a stated one names file and key.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from analyzer.evidence import Evidence, Grade
from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.rule import BoardClass


def presumed(quantity: str, value: float, unit: str, note: str = "not stated") -> Evidence:
    """A default, marked as the assumption it is."""
    return Evidence(quantity, Span.exact(value), unit, "default", Grade.PRESUMED, note=note)


@dataclass(frozen=True, slots=True)
class Site:
    """Where the board works.

    Attributes:
        ambient: Air temperature outside the enclosure [°C].
        enclosure_rise: Rise of the air inside above it [K].
        altitude: Height above sea level [m].
        air_speed: Air speed over the board [m/s]; 0 is still air.
        cooling: "natural", "forced" (air over parts) or "fan-box" (air rise of a fan-cooled box).
        altitude_exponent: Exponent n of the pressure ratio; None takes the one of the cooling mode.
    """

    ambient: Evidence = field(default_factory=lambda: presumed("ambient", 40.0, "°C"))
    enclosure_rise: Evidence = field(default_factory=lambda: presumed("enclosure rise", 0.0, "K"))
    altitude: Evidence = field(default_factory=lambda: presumed("altitude", 0.0, "m"))
    air_speed: Evidence = field(default_factory=lambda: presumed("air speed", 0.0, "m/s", "still air presumed"))
    cooling: str = "natural"
    altitude_exponent: float | None = None


@dataclass(frozen=True, slots=True)
class Board:
    """What the bare board is.

    Attributes:
        board_class: Stated class; None derives it from layers or conductivity, else the poorer class is used.
        copper_layers: Number of copper layers, stated.
        pour: Copper area on the heat-carrying pins [m²], stated for the whole board.
        conductivity: Effective in-plane conductivity k_eff [W/(m·K)], stated.
        source: Where the class was stated.
    """

    board_class: BoardClass | None = None
    copper_layers: int | None = None
    pour: Evidence | None = None
    conductivity: Evidence | None = None
    source: str = ""


@dataclass(frozen=True, slots=True)
class Policy:
    """Margin policy, apart from the data sheet's own limits.

    Attributes:
        name: Name of the policy.
        junction_over: The policy's junction limit is the rating less this [K].
        junction_tight: Above the rating less this [K] the verdict is tight.
        junction_factor: Further limit as a fraction of the rating in °C, or None.
        junction_cap: Further absolute limit [°C], or None.
        input_fraction: Greatest input voltage as a fraction of the absolute maximum.
        current_fraction: Greatest output current as a fraction of the rating.
        verified: False for templates whose figures nobody has checked against the standard.
        source: Standard and clause, or "house policy".
    """

    name: str = "house"
    junction_over: float = 10.0
    junction_tight: float = 25.0
    junction_factor: float | None = None
    junction_cap: float | None = None
    input_fraction: float = 0.9
    current_fraction: float = 0.9
    verified: bool = True
    source: str = "house policy"


@dataclass(frozen=True, slots=True)
class StatedDraw:
    """A current somebody stated for a part or a rail.

    Attributes:
        ref: Reference of the part; "" for a draw on a rail without a part (an off-board load).
        rail: Net or rail name; "" when the part hangs on one rail only.
        amps: Current [A] or None if a power is stated.
        watts: Power [W] or None if a current is stated.
        pulse: Shape of a pulsed draw.
        key: Identity of the part where it was typed against one (workbook), "" otherwise.
    """

    ref: str
    rail: str
    amps: Evidence | None = None
    watts: Evidence | None = None
    pulse: Pulse | None = None
    key: str = ""


@dataclass(frozen=True, slots=True)
class PartStatement:
    """What somebody stated about one part, by reference.

    Attributes:
        rule: Name of the rule to use.
        identity: Part number to use in place of the fields.
        package: Package family.
        vin, vout: Input and output voltage.
        theta_ja: θJA on this very board.
        board_class: Board class of that θJA, or of this spot of the board.
        pour: Copper area at this part [m²].
        vias: Number of thermal vias (0.3 mm) between its pad and that copper.
        heat_sink: (θJC, θCS, θSA) in K/W.
        case_measured, board_measured: Temperature measured at the case top / board beside it [°C].
        junction_max: Junction limit to use [°C].
        share: Share of the rail's load where several feeds are in parallel.
        is_regulator: False declares that this part is no regulator.
        figures: Further electrical figures by key of `rule.FIGURES`.
    """

    rule: str | None = None
    identity: str | None = None
    package: str | None = None
    vin: Evidence | None = None
    vout: Evidence | None = None
    theta_ja: Evidence | None = None
    board_class: BoardClass | None = None
    pour: Evidence | None = None
    vias: int | None = None
    heat_sink: tuple[Evidence, Evidence, Evidence] | None = None
    case_measured: Evidence | None = None
    board_measured: Evidence | None = None
    junction_max: Evidence | None = None
    share: float | None = None
    is_regulator: bool | None = None
    figures: Mapping[str, Evidence] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Waiver:
    """A finding accepted by a person: for one finding kind and one part or rail, with a reason."""

    finding: str
    subject: str
    reason: str
    expires: str | None = None
    where: str = ""


@dataclass(frozen=True, slots=True)
class Coupling:
    """Heat from a neighbour, symmetric: a resistance that counts, or a distance that only informs.

    Attributes:
        ref, by: The two parts.
        theta: Kelvin at one per watt in the other [K/W].
        distance: Distance between them [m], for the published estimate of a copper plane; never in the budget.
    """

    ref: str
    by: str
    theta: Evidence | None = None
    distance: Evidence | None = None


@dataclass(frozen=True)
class Settings:
    """Everything stated about a board, defaults filled in and marked.

    Attributes:
        supplies: Net or rail name → voltage.
        supply_names: Net or rail name → name of a standard supply in `rules/supplies.toml`.
        draws: Stated currents and powers.
        draw_fields: Names of symbol fields that hold load currents.
        parts: Statements by reference.
        links: Reference → True (joins its nets) or False (does not), overriding the rule of thumb.
        resistor_tolerance: Tolerance where the value text gives none, as evidence (fraction).
        shunt_max: Greatest resistance that still counts as a link in the power path [Ω].
        unfitted_fields: Field name → values that mean "not fitted".
        unfitted_values: Values that mean "not fitted".
        rule_files: Further rule files, as paths.
        fail_on: Level that makes the exit status 5.
        file: The settings file read, "" if none.
    """

    site: Site = field(default_factory=Site)
    board: Board = field(default_factory=Board)
    policy: Policy = field(default_factory=Policy)
    supplies: Mapping[str, Evidence] = field(default_factory=dict)
    supply_names: Mapping[str, str] = field(default_factory=dict)
    draws: tuple[StatedDraw, ...] = ()
    draw_fields: tuple[str, ...] = ("I_load",)
    parts: Mapping[str, PartStatement] = field(default_factory=dict)
    links: Mapping[str, bool] = field(default_factory=dict)
    resistor_tolerance: Evidence = field(default_factory=lambda: presumed("resistor tolerance", 0.01, "1"))
    shunt_max: float = 1.0
    unfitted_fields: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    unfitted_values: tuple[str, ...] = ()
    rule_files: tuple[str, ...] = ()
    coupling: tuple[Coupling, ...] = ()
    waivers: tuple[Waiver, ...] = ()
    fail_on: str = "over"
    file: str = ""
