"""Draws the fixture boards: `python fixture_boards/make.py`. Boards, parts and figures are invented."""

from __future__ import annotations

from pathlib import Path

from drawing import DIODE, TWO_PIN, Drawing, Part, Project, Shape, Sheet, write

HERE = Path(__file__).resolve().parent


def two(letter: str) -> Shape:
    return Shape(TWO_PIN.pins, 1.27, 1.27, letter, True)


LINEAR = Shape((("1", "GND", "power_in", "b", 0), ("2", "OUT", "power_out", "r", 0), ("3", "IN", "power_in", "l", 0)), 7.62, 5.08)
FLOATING = Shape((("1", "ADJ", "input", "b", 0), ("2", "OUT", "power_out", "r", 0), ("3", "IN", "power_in", "l", 0)), 7.62, 5.08)
BUCK = Shape(
    (
        ("1", "VIN", "power_in", "l", -1),
        ("2", "EN", "input", "l", 1),
        ("3", "GND", "power_in", "b", 0),
        ("4", "SW", "output", "r", -1),
        ("5", "FB", "input", "r", 1),
    )
)
PUMP = Shape(
    (
        ("1", "VIN", "power_in", "l", -1),
        ("2", "GND", "power_in", "b", 0),
        ("3", "VOUT", "power_out", "r", -1),
        ("4", "C+", "passive", "l", 1),
        ("5", "C-", "passive", "r", 1),
    )
)
CHIP = Shape((("1", "VDD", "power_in", "t", 0), ("2", "VSS", "power_in", "b", 0), ("3", "IO", "bidirectional", "r", 0)))
OPAMP = Shape((("1", "V+", "power_in", "t", 0), ("2", "V-", "power_in", "b", 0), ("3", "OUT", "output", "r", 0)))
SOCKET = Shape((("1", "1", "passive", "r", -1), ("2", "2", "passive", "r", 1)), 5.08, 5.08, "J")
SHAPES = {
    "R": two("R"),
    "C": two("C"),
    "L": two("L"),
    "Bead": two("FB"),
    "Diode": DIODE,
    "Lamp": DIODE,
    "Linear": LINEAR,
    "Floating": FLOATING,
    "Buck": BUCK,
    "Boost": BUCK,
    "Pump": PUMP,
    "Chip": CHIP,
    "OpAmp": OPAMP,
    "Socket": SOCKET,
}
SOT223 = "Package_TO_SOT_SMD:SOT-223-3_TabPin2"
DPAK = "Package_TO_SOT_SMD:TO-252-3_TabPin2"
SOIC_EP = "Package_SO:SOIC-8-1EP_3.9x4.9mm_P1.27mm_EP2.29x3mm"
R0603 = "Resistor_SMD:R_0603_1608Metric"
C0805 = "Capacitor_SMD:C_0805_2012Metric"


def resistor(ref: str | tuple[str, ...], value: str, at: tuple[float, float], a: str, b: str, **more: object) -> Part:
    return Part(ref, "R", value, at, {"1": a, "2": b}, R0603, **more)  # type: ignore[arg-type]


def capacitor(ref: str | tuple[str, ...], value: str, at: tuple[float, float], a: str, b: str) -> Part:
    return Part(ref, "C", value, at, {"1": a, "2": b}, C0805)


def linear(ref: str | tuple[str, ...], value: str, at: tuple[float, float], i: str, o: str, footprint: str = SOT223) -> Part:
    return Part(ref, "Linear", value, at, {"3": i, "2": o, "1": "GND"}, footprint, description="Low-dropout regulator")


def chip(ref: str | tuple[str, ...], value: str, at: tuple[float, float], rail: str, **fields: str) -> Part:
    return Part(ref, "Chip", value, at, {"1": rail, "2": "GND"}, "Package_SO:SOIC-8_3.9x4.9mm_P1.27mm", fields)


def seedling_bench() -> Project:
    """24 V greenhouse bench: buck, linear behind it, ferrite-split rail, adjustable linear that is too hot. KiCad 6."""
    parts = [
        Part("J1", "Socket", "24 V in", (40.64, 50.8), {"1": "+24V", "2": "GND"}, "TerminalBlock:TerminalBlock_2P"),
        capacitor("C1", "10uF/50V", (63.5, 50.8), "+24V", "GND"),
        Part(
            "U1",
            "Buck",
            "QXB2405",
            (93.98, 50.8),
            {"1": "+24V", "2": "+24V", "3": "GND", "4": "SW5", "5": "FB5"},
            SOIC_EP,
            {"MPN": "QXB2405"},
            "Step-down converter",
        ),
        Part("L1", "L", "22uH/3A/DCR=40mR", (132.08, 45.72), {"1": "SW5", "2": "+5V"}, "Inductor_SMD:L_7.3x7.3mm"),
        resistor("R1", "105k 1%", (152.4, 45.72), "+5V", "FB5"),
        resistor("R2", "20k 1%", (172.72, 45.72), "FB5", "GND"),
        capacitor("C2", "47uF/10V", (193.04, 45.72), "+5V", "GND"),
        linear("U2", "QXL2133-3.3", (93.98, 96.52), "+5V", "+3V3"),
        Part("FB1", "Bead", "600R@100MHz", (132.08, 96.52), {"1": "+3V3", "2": "+3V3A"}, "Inductor_SMD:L_0805"),
        chip("U3", "GBC-7", (160.02, 96.52), "+3V3", I_load="45/70 mA"),
        chip("U4", "HSN-2", (193.04, 96.52), "+3V3A", I_load="6/9 mA"),
        resistor("R3", "1k 1%", (220.98, 45.72), "+5V", "LAMP"),
        Part("D1", "Lamp", "LED GREEN", (236.22, 45.72), {"2": "LAMP", "1": "GND"}, "LED_SMD:LED_0603_1608Metric"),
        Part("U5", "Floating", "QXA40", (93.98, 137.16), {"3": "+24V", "2": "+12V", "1": "ADJ12"}, SOT223, {"MPN": "QXA40"}),
        resistor("R4", "240R 1%", (132.08, 137.16), "+12V", "ADJ12"),
        resistor("R5", "2.05k 1%", (152.4, 137.16), "ADJ12", "GND"),
        chip("U6", "VALVE-DRV", (182.88, 137.16), "+12V", I_load="80/95 mA"),
        resistor("R9", "0R", (220.98, 137.16), "+12V", "+5V", fields={"DNP": "yes"}),
    ]
    texts = [("Valves: 95 mA at most when all three are open", (170.18, 160.02)), ("R9 only for bench tests", (210.82, 160.02))]
    drawing = Drawing("seedling_bench.kicad_sch", parts, texts)
    return Project("seedling_bench", 20211123, SHAPES, ("+24V", "+12V", "+5V", "+3V3", "+3V3A", "GND"), [drawing])


def lane_lamp() -> Project:
    """Vehicle side lamp: a channel sheet used twice behind a series diode, and a controller nobody annotated. KiCad 8."""
    channel = [
        linear(("U101", "U201"), "QXL2150-5.0", (93.98, 50.8), "VP", "V5", DPAK),
        capacitor(("C101", "C201"), "10uF/25V", (63.5, 50.8), "VP", "GND"),
        capacitor(("C102", "C202"), "10uF/10V", (132.08, 50.8), "V5", "GND"),
        resistor(("R101", "R201"), "150R 1%", (152.4, 45.72), "V5", "LAMP_A"),
        Part(("D101", "D201"), "Lamp", "LED WHITE", (172.72, 45.72), {"2": "LAMP_A", "1": "GND"}, "LED_SMD:LED_0805"),
        chip(("U102", "U202"), "FADE-1", (203.2, 50.8), "V5", I_load="20/24 mA"),
    ]
    root = [
        Part("J1", "Socket", "lamp feed", (40.64, 50.8), {"1": "+12V_IN", "2": "GND"}, "Connector:Lamp_2P"),
        Part("D1", "Diode", "SK34 Schottky", (71.12, 50.8), {"2": "+12V_IN", "1": "+12V"}, "Diode_SMD:D_SMA", {}, "Schottky diode"),
        capacitor("C1", "47uF/35V", (91.44, 50.8), "+12V", "GND"),
        linear("U1", "QXL2133-3.3", (121.92, 50.8), "+12V", "+3V3"),
        capacitor("C2", "10uF/10V", (154.94, 50.8), "+3V3", "GND"),
        chip("U2", "LAMP-CTL", (182.88, 50.8), "+3V3"),
        resistor("R1", "0R", (215.9, 50.8), "+12V", "+3V3", dnp=True),
    ]
    texts = [("U2: up to 30 mA with both lamps fading", (172.72, 76.2))]
    sheet = Sheet(("Left", "Right"), "channel.kicad_sch", ((71.12, 101.6), (121.92, 101.6)), {"VP": ("+12V", "+12V")})
    drawings = [
        Drawing("lane_lamp.kicad_sch", root, texts, (), [sheet]),
        Drawing("channel.kicad_sch", channel, (), ("VP",)),
    ]
    return Project("lane_lamp", 20231120, SHAPES, ("+12V_IN", "+12V", "+3V3", "GND"), drawings)


def tide_logger() -> Project:
    """Battery tide gauge: boost, linear and a negative rail, with no current stated anywhere. KiCad 9."""
    parts = [
        Part("J1", "Socket", "Li-ion cell", (40.64, 50.8), {"1": "VBAT", "2": "GND"}, "Connector:Battery_2P"),
        capacitor("C1", "22uF/10V", (63.5, 50.8), "VBAT", "GND"),
        Part(
            "U1",
            "Boost",
            "QXU12",
            (93.98, 50.8),
            {"1": "VBAT", "2": "VBAT", "3": "GND", "4": "SWB", "5": "FBB"},
            "Package_TO_SOT_SMD:SOT-23-5",
            {"MPN": "QXU12"},
            "Step-up (boost) converter",
        ),
        Part("L1", "L", "10uH", (132.08, 45.72), {"1": "VBAT", "2": "SWB"}, "Inductor_SMD:L_5x5mm"),
        Part("D1", "Diode", "SK24 Schottky", (152.4, 45.72), {"2": "SWB", "1": "+9V"}, "Diode_SMD:D_SMA", {}, "Schottky diode"),
        resistor("R1", "140k 1%", (172.72, 45.72), "+9V", "FBB"),
        resistor("R2", "10k 1%", (193.04, 45.72), "FBB", "GND"),
        capacitor("C2", "22uF/16V", (213.36, 45.72), "+9V", "GND"),
        linear("U2", "QXL2150-5.0", (93.98, 96.52), "+9V", "+5V"),
        capacitor("C3", "10uF/10V", (132.08, 96.52), "+5V", "GND"),
        Part("U3", "Pump", "QXN5", (162.56, 96.52), {"1": "+5V", "2": "GND", "3": "-5V", "4": "CPP", "5": "CPN"}, "Package_TO_SOT_SMD:SOT-23-5", {"MPN": "QXN5"}, "Charge pump inverter"),
        capacitor("C4", "2.2uF", (193.04, 96.52), "CPP", "CPN"),
        capacitor("C5", "10uF/10V", (213.36, 96.52), "GND", "-5V"),
        Part("U4", "OpAmp", "GAUGE-AMP", (241.3, 96.52), {"1": "+5V", "2": "-5V"}, "Package_SO:SOIC-8_3.9x4.9mm_P1.27mm"),
        chip("U5", "LOG-3", (93.98, 137.16), "+5V"),
    ]
    drawing = Drawing("tide_logger.kicad_sch", parts, [("Logger wakes every minute", (83.82, 157.48))])
    return Project("tide_logger", 20250114, SHAPES, ("VBAT", "+9V", "+5V", "-5V", "GND"), [drawing])


BOARDS = (seedling_bench, lane_lamp, tide_logger)

if __name__ == "__main__":
    for board in BOARDS:
        project = board()
        write(project, HERE / project.name)
