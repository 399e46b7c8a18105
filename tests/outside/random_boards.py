"""Random small projects for comparing netlists with KiCad: sheets, labels, power, hidden pins, buses, units."""

from __future__ import annotations

import random
from dataclasses import dataclass, field

from sketch import ROOT, TP, At, label, library, no_connect, part, pin, schematic, sheet, wire

CHIP = library(
    "U",
    pin("1", "VIN", "power_in", at=(0, 0)),
    pin("2", "GND", "power_in", at=(10, 0)),
    pin("3", "GND", "power_in", at=(20, 0)),
    pin("4", "OUT", "output", at=(0, -10)),
    pin("5", "NC", "no_connect", at=(10, -10)),
    pin("6", "~", "passive", at=(20, -10)),
)
GATE = library(
    "G",
    units={
        "0_1": pin("8", "V+", "power_in", at=(0, -10)),
        "1_1": pin("1", "A", "input", at=(0, 0)),
        "2_1": pin("2", "A", "input", at=(0, 0)),
    },
)
HIDDEN = library("H", pin("14", "VCC", "power_in", at=(0, 0), hide=True), pin("1", "IN", "input", at=(10, 0)))
POWER = {name: library(name, pin("1", name, "power_in"), power="(power)", reference="#PWR") for name in ("VCC", "+5V")}
LIBS = (TP, CHIP, GATE, HIDDEN, *POWER.values())

NAMES = ["A", "B", "C", "D"]
BUSES = ["D[0..1]", "E[1..0]", "X[0..2]", "Q{A B}"]
MEMBERS = ["D0", "D1", "E0", "E1", "X0", "X1", "X2", "Q.A", "Q.B"]


@dataclass
class Drawer:
    """Draws one project; `files` maps file names (without ending) to their text."""

    rnd: random.Random
    files: dict[str, str] = field(default_factory=dict)
    count: int = 0

    def next(self) -> int:
        self.count += 1
        return self.count

    def tap(self, at: At, path: str) -> str:
        number = self.next()
        return part(f"TP{number}", "TP", at, path=path, uuid=f"tp{number}")

    def sheet_file(self, level: int, path: str) -> str:
        rnd = self.rnd
        size = rnd.randint(3, 5)
        items: list[str] = []
        middles: set[At] = set()

        def spot() -> At:
            return 10 * rnd.randint(0, size), 10 * rnd.randint(0, size)

        def kind() -> str:
            return rnd.choice(["label", "label", "label", "hierarchical_label"])

        for _ in range(rnd.randint(2, 14)):
            x, y = spot()
            dx, dy = rnd.choice([(10, 0), (0, 10)])
            items.append(wire((x, y), (x + dx, y + dy)))
            middle = (x + dx / 2, y + dy / 2)
            # two labels on one middle are read differently by KiCad 9 and 10
            if rnd.random() < 0.25 and middle not in middles:
                middles.add(middle)
                items.append(label(rnd.choice(NAMES), middle, kind()))
        items += [self.tap(spot(), path) for _ in range(rnd.randint(2, 9))]
        for _ in range(rnd.randint(0, 2)):
            number = self.next()
            turn, mirror = str(rnd.choice([0, 90, 180, 270])), rnd.choice(["", "(mirror x)", "(mirror y)"])
            items.append(part(f"U{number}", "U", spot(), path=path, turn=turn, more=mirror, uuid=f"u{number}"))
        if rnd.random() < 0.4:
            number = self.next()
            items += [part(f"U{number}", "G", spot(), unit=n, path=path, uuid=f"g{number}{n}") for n in (1, 2)]
        if rnd.random() < 0.25:
            number = self.next()
            items.append(part(f"U{number}", "H", spot(), path=path, uuid=f"h{number}"))
        for _ in range(rnd.choice([0, 0, 1, 2])):
            number = self.next()
            items.append(part(f"#PWR{number}", rnd.choice(list(POWER)), spot(), path=path, uuid=f"p{number}"))
        for _ in range(rnd.randint(0, 6)):
            items.append(label(rnd.choice(NAMES), spot(), kind()))
            if rnd.random() < 0.08:
                items.append(label(rnd.choice(["G1", "G2"]), spot(), "global_label"))
        items += [no_connect(spot()) for _ in range(rnd.randint(0, 2))]
        items += self.below(level, path)
        if rnd.random() < 0.5:
            items += self.bus(path)
        name = f"f{len(self.files)}" if level else "p"
        uuid = ROOT if level == 0 else f"00000000-0000-4000-8000-0000000001{len(self.files):02d}"
        self.files[name] = schematic(*items, libs=LIBS, uuid=uuid)
        return f"{name}.kicad_sch"

    def below(self, level: int, path: str) -> list[str]:
        """Sheet symbols, and what hangs on their pins; pins lie on the left edge, as KiCad keeps them."""
        rnd = self.rnd
        items: list[str] = []
        for number in range(rnd.randint(0 if level else 1, 2) if level < 2 else 0):
            uuid = f"00000000-0000-4000-9000-0000000000{level}{number}"
            x = 300 + 100 * number
            names = rnd.sample(NAMES, rnd.randint(0, 3))
            pins = [(name, (x, 300 + 10 * row)) for row, name in enumerate(names)]
            for _, (px, py) in pins:
                end = (px - 10, py) if rnd.random() < 0.4 else (px, py)
                if end[0] != px:
                    items.append(wire((px, py), end))
                if rnd.random() < 0.5:
                    items.append(label(rnd.choice(NAMES), end, rnd.choice(["label", "hierarchical_label"])))
                if rnd.random() < 0.4:
                    items.append(self.tap(end, path))
            if rnd.random() < 0.4:
                bus = rnd.choice(BUSES)
                pins.append((bus, (x, 400)))
                items.append(wire((x, 400), (x - 20, 400), "bus"))
                if rnd.random() < 0.6:
                    items.append(label(rnd.choice(BUSES), (x - 10, 400)))
            below = self.sheet_file(level + 1, f"{path}/{uuid}")
            items.append(sheet(f"s{number}", below, *pins, uuid=uuid, at=(x, 290)))
        return items

    def bus(self, path: str) -> list[str]:
        rnd = self.rnd
        items = [wire((100, 0), (140, 0), "bus")]
        items.append(label(rnd.choice(BUSES), (110, 0), rnd.choice(["label", "hierarchical_label"])))
        rows = rnd.sample(range(100, 300, 10), rnd.randint(1, 5))
        for y in rows:
            items += [self.tap((100, y), path), label(rnd.choice(MEMBERS), (100, y))]
        return items


def random_board(seed: int) -> dict[str, str]:
    """Files of one random project by name without ending; the root is "p"."""
    drawer = Drawer(random.Random(seed))
    drawer.sheet_file(0, f"/{ROOT}")
    return drawer.files
