"""`heatledger.toml`: what it may say, and that every fault in it is reported with its place."""

from __future__ import annotations

from pathlib import Path

import pytest

from analyzer.errors import InputError
from analyzer.evidence import Grade
from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.rule import BoardClass
from analyzer.settings import Settings
from analyzer.settings_file import load_settings

OUTSIDE = "lies outside the possible: at least"
FULL = """
[site]
ambient = "25..55 °C"
enclosure_rise = "12 K"
altitude = "2000 m"
air_speed = "1.5 m/s"
cooling = "forced"
altitude_exponent = 0.9

[board]
board_class = "2s2p"
copper_layers = 4
pour = "300 mm²"
conductivity = "20 W/(m·K)"

[policy]
junction_over = "15 K"
input_fraction = "80 %"

[supplies]
"+12V" = "11.4..12.6 V"
VBUS = "usb-2.0"
V24 = "24v-industrial"
VNEG = "-5 V ±2 %"

[draws]
U3 = "100/150 mA"
"U4@+3V3" = "2 A for 5 ms every 100 ms"
"@+5V" = { watts = "1 W" }

[parts.U7]
rule = "my-ldo"
identity = "XC6210B332"
package = "SOT-223"
vin = "12 V"
theta_ja = "50/62 K/W"
board_class = "1s+pour"
heat_sink = { theta_jc = "3 K/W", theta_cs = "0.5 K/W", theta_sa = "12 K/W" }
case_measured = "71 °C"
junction_max = "125 °C"
share = "60 %"
is_regulator = true
quiescent = "5 mA"
efficiency = "85..90 %"

[links]
FB3 = true
R7 = false

[rules]
files = ["parts.toml"]

[fields]
draws = ["I_load", "Load"]
unfitted = { DNP = ["1", "yes"], CONFIG = "-ENV" }
unfitted_values = ["NA"]

[defaults]
resistor_tolerance = "5 %"
shunt_max = "0.5 Ω"

[[coupling]]
ref = "U1"
by = "U2"
theta = "8 K/W"

[[waiver]]
finding = "draw-stated-twice"
subject = "U3"
reason = "measured on the prototype"
expires = 2027-06-30

[gate]
fail_on = "tight"
"""


@pytest.fixture
def write(tmp_path):
    def of(text: str, name: str = "heatledger.toml") -> Path:
        file = tmp_path / name
        file.write_text(text, encoding="utf-8")
        return file

    return of


def faults(file: Path) -> list[str]:
    with pytest.raises(InputError) as caught:
        load_settings(file)
    assert caught.value.exit_status == 3
    assert all(fault.file == str(file) for fault in caught.value.faults)
    return [f"{fault.place}: {fault.what}" for fault in caught.value.faults]


def test_no_file_is_all_defaults():
    settings = load_settings(None)
    assert settings == Settings()
    assert (settings.site.ambient.span, settings.site.ambient.grade) == (Span.exact(40.0), Grade.PRESUMED)


def test_empty_file_is_all_defaults_too(write):
    file = write("")
    assert load_settings(file) == Settings(file=str(file))


def test_everything_that_can_be_stated(write):
    settings = load_settings(write(FULL))
    site, board, part = settings.site, settings.board, settings.parts["U7"]
    assert site.ambient.span == Span(25, 40, 55)
    assert (site.ambient.source, site.ambient.grade) == ("heatledger.toml [site] ambient", Grade.STATED)
    assert (site.enclosure_rise.span.nominal, site.altitude.span.nominal, site.air_speed.span.nominal) == (
        12,
        2000,
        1.5,
    )
    assert (site.cooling, site.altitude_exponent) == ("forced", 0.9)
    assert (board.board_class, board.copper_layers) == (BoardClass.HIGH, 4)
    assert board.pour.span == Span.exact(3e-4)
    assert board.conductivity.span == Span.exact(20.0)
    assert (settings.policy.junction_over, settings.policy.junction_tight) == (15.0, 25.0)
    assert settings.policy.input_fraction == 0.8
    assert settings.policy.source == "house policy, with figures stated in heatledger.toml"
    assert settings.supplies["+12V"].span == Span(11.4, 12.0, 12.6)
    assert settings.supplies["VNEG"].span.low == pytest.approx(-5.1)
    assert settings.supply_names == {"VBUS": "usb-2.0", "V24": "24v-industrial"}
    u3, u4, rail = settings.draws
    assert (u3.ref, u3.rail, u3.amps.span) == ("U3", "", Span(0.1, 0.1, 0.15))
    assert u3.amps.source == "heatledger.toml [draws] U3"
    assert (u4.ref, u4.rail, u4.pulse) == ("U4", "+3V3", Pulse(Span.exact(2.0), 0.005, 0.1))
    assert (rail.ref, rail.rail, rail.amps, rail.watts.span) == ("", "+5V", None, Span.exact(1.0))
    assert (part.rule, part.identity, part.package) == ("my-ldo", "XC6210B332", "SOT-223")
    assert part.theta_ja.span == Span(50, 50, 62)
    assert part.board_class is BoardClass.POUR
    assert [theta.span.nominal for theta in part.heat_sink] == [3, 0.5, 12]
    assert (part.case_measured.span.nominal, part.junction_max.span.nominal) == (71, 125)
    assert (part.share, part.is_regulator) == (0.6, True)
    assert part.figures["quiescent"].span == Span.exact(0.005)
    assert part.figures["efficiency"].span == Span(0.85, 0.875, 0.9)
    assert part.figures["quiescent"].source == "heatledger.toml [parts.U7] quiescent"
    assert settings.links == {"FB3": True, "R7": False}
    assert settings.rule_files == ("parts.toml",)
    assert settings.draw_fields == ("I_load", "Load")
    assert settings.unfitted_fields == {"DNP": ("1", "yes"), "CONFIG": ("-ENV",)}
    assert settings.unfitted_values == ("NA",)
    assert (settings.resistor_tolerance.span.high, settings.shunt_max) == (0.05, 0.5)
    (coupling,) = settings.coupling
    assert coupling.theta is not None
    assert (coupling.ref, coupling.by, coupling.theta.span) == ("U1", "U2", Span.exact(8.0))
    (waiver,) = settings.waivers
    assert (waiver.finding, waiver.subject, waiver.expires) == ("draw-stated-twice", "U3", "2027-06-30")
    assert settings.fail_on == "tight"


def test_all_faults_at_once_each_with_table_and_key(write):
    file = write("""
        sight = 1
        [site]
        ambient = 40
        altitud = "3 m"
        cooling = "forsed"
        air_speed = "-1 m/s"
        [board]
        copper_layers = "4"
        [policy]
        name = "hous"
        junction_over = "15 K..20 K"
        [supplies]
        X = "12v"
        [draws]
        "U3@+3V3" = "120 ma"
        U5 = { watts = "1 W", amps = "3 A" }
        U6 = "-3 mA"
        "@" = "1 A"
        [parts.U7]
        efficency = 0.9
        efficiency = 1.2
        is_regulator = "no"
        theta_ja = "0 K/W"
        heat_sink = { theta_jc = "3 K/W" }
        [links]
        FB3 = "yes"
        [fields]
        unfitted = { X = 3 }
        [gate]
        fail_on = "never ever"
        [[waiver]]
        finding = "draw-stated-twic"
        subject = "U3"
        expires = "next year"
        [[coupling]]
        ref = "U1"
        by = "U1"
    """)
    assert faults(file) == [
        "[site] ambient: 40 has no unit",
        "[site] air_speed: '-1 m/s' lies outside the possible: at least 0 m/s, at most 100 m/s",
        "[site] cooling: 'forsed' is not known; did you mean 'forced'?",
        "[site] altitud: unknown key; did you mean 'altitude'?",
        "[board] copper_layers: must be a whole number, not text",
        "[policy] name: 'hous' is not known; did you mean 'house'?",
        "[policy] junction_over: must be one value, not a range",
        "[draws] U3@+3V3: '120 ma': 'ma' is not a unit; capitals matter: mA",
        "[draws.U5] watts: state either watts or amps",
        "[draws] U6: '-3 mA' is a negative current",
        "[draws] @: names neither a part nor a rail",
        "[parts.U7] theta_ja: '0 K/W' lies outside the possible: above 0 K/W, at most 2000 K/W",
        "[parts.U7.heat_sink] theta_cs: is missing",
        "[parts.U7.heat_sink] theta_sa: is missing",
        "[parts.U7] is_regulator: must be true or false, not text",
        "[parts.U7] efficiency: '1.2' lies outside the possible: above 0 %, at most 99.9 %",
        "[parts.U7] efficency: unknown key; did you mean 'efficiency'?",
        "[links] FB3: must be true or false, not text",
        "[[coupling]] number 1 theta: is missing",
        "[[coupling]] number 1 by: U1 cannot be its own neighbour",
        "[[waiver]] number 1 finding: 'draw-stated-twic' is no kind of finding; did you mean 'draw-stated-twice'?",
        "[[waiver]] number 1 reason: is missing",
        "[[waiver]] number 1 expires: must be a day, written 2027-03-31",
        "[supplies] X: '12v': 'v' is not a unit; capitals matter: V",
        '[fields.unfitted] X: must be a list of texts, as ["a", "b"]',
        "[gate] fail_on: 'never ever' is not known; did you mean 'never'?",
        "[sight]: unknown table; did you mean 'site'?",
    ]


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("site = 3", "[site]: must be a table, not a whole number"),
        ("[parts]\nU7 = '62 K/W'", "[parts] U7: must be a table, not text"),
        ("[site]\nambient = ''", "[site] ambient: empty text where a quantity is expected"),
        ("[site]\nambient = ['40 °C']", "[site] ambient: must be text with a unit, not a list"),
        (
            "[site]\nambient = '9000 °C'",
            "[site] ambient: '9000 °C' lies outside the possible: at least -100 °C, at most 400 °C",
        ),
        ("[rules]\nfiles = 3", '[rules] files: must be a list of texts, as ["a", "b"]'),
        ("[draws]\nU3 = 0.12", "[draws] U3: must be text, not a number"),
        ("[draws]\nU3 = {}", "[draws.U3] watts: state either watts or amps"),
        ("[board]\ncopper_layers = true", "[board] copper_layers: must be a whole number, not true or false"),
        ("[board]\ncopper_layers = 0", "[board] copper_layers: 0 lies outside 1 to 100"),
        ("waiver = 3", "[waiver]: must be a list of tables, written [[waiver]]"),
        (
            "[defaults]\nresistor_tolerance = 5",
            f"[defaults] resistor_tolerance: '5' {OUTSIDE} 0 %, at most 50.0 %",
        ),
    ],
)
def test_wrong_types_and_values(write, text, fault):
    assert faults(write(text)) == [fault]


def test_key_without_quotes_says_what_to_do(write):
    with pytest.raises(InputError) as caught:
        load_settings(write('[draws]\nU3@+3V3 = "1 A"\n'))
    (fault,) = caught.value.faults
    assert fault.place.startswith("line 2")
    assert "quotes" in fault.remedy


@pytest.mark.parametrize(
    ("data", "what"),
    [
        (b"\xff\xfe[\x00", "is not UTF-8 text"),
        (b"[site]\nambient = '\xb0C'", "is not UTF-8 text"),
        (b"x = " + b"[" * 5000, "is nested too deeply"),
        (b"x = 1" + b"0" * 5000, "is not valid TOML"),
        (b"[site]\n[site]\n", "is not valid TOML"),
        (b"# " + b"x" * 2_000_000, "larger than 1048576 bytes"),
    ],
)
def test_unreadable_content(tmp_path, data, what):
    file = tmp_path / "heatledger.toml"
    file.write_bytes(data)
    (fault,) = faults(file)
    assert what in fault


def test_missing_file_and_folder(tmp_path):
    assert "cannot be read" in faults(tmp_path / "none.toml")[0]
    assert "cannot be read" in faults(tmp_path)[0]


def test_byte_order_mark_of_an_editor_is_harmless(tmp_path):
    file = tmp_path / "heatledger.toml"
    file.write_bytes(b"\xef\xbb\xbf[gate]\nfail_on = 'open'\n")
    assert load_settings(file).fail_on == "open"


def test_shipped_policy_by_name_with_a_figure_replaced(write, tmp_path, monkeypatch):
    policies = tmp_path / "rules" / "policies"
    policies.mkdir(parents=True)
    (policies / "strict.toml").write_text(
        'junction_over = "40 K"\njunction_cap = "110 °C"\nverified = false\nsource = "Standard 7, clause 3"\n', "utf-8"
    )
    monkeypatch.setattr("analyzer.settings_policy.rules_folder", lambda: tmp_path / "rules")
    policy = load_settings(write('[policy]\nname = "strict"\njunction_cap = "100 °C"\n')).policy
    assert (policy.name, policy.junction_over, policy.junction_cap, policy.verified) == ("strict", 40.0, 100.0, False)
    assert policy.source == "Standard 7, clause 3, with figures stated in heatledger.toml"


def test_shipped_policies_are_valid():
    from analyzer.settings_policy import read_policy
    from analyzer.shipped import rules_folder
    from analyzer.toml_table import Table, read_toml

    for file in sorted((rules_folder() / "policies").glob("*.toml")):
        found: list = []
        policy = read_policy(Table(file, "", read_toml(file), found))
        assert found == []
        assert policy.source, f"{file.name} names no source"
