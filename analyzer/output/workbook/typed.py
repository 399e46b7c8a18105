"""The way back in: what a person typed into a workbook, keyed by part identity and rail, never by row.

Read are currents and notes, answers to findings, the sign-off, and edits of θ and of the Settings sheet. Every fault of
the file is reported at once, with sheet and cell.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.evidence import Evidence, Grade
from analyzer.grammar import parse, parse_load
from analyzer.load import Pulse
from analyzer.output.workbook.archive_check import check_archive
from analyzer.output.workbook.layout import HEAD_ROW, SIGN_OFF
from analyzer.quantity import Dimension, Span
from analyzer.rule import BoardClass
from analyzer.settings import Board, PartStatement, Policy, Settings, Site, StatedDraw

Cells = tuple[object, object, object]
_TYPE_HEADS = ("Type low [A]", "Type nominal [A]", "Type high [A]")


@dataclass(frozen=True)
class Typed:
    """What was typed into a workbook.

    Attributes:
        file: The workbook.
        cells: (identity, rail) → the three current cells as typed, numbers or text.
        parts: (identity, rail) → reference and value, to name what is gone.
        draws: The same as stated draws.
        notes: (identity, rail) → note.
        answers: (finding, subject, identity) → answer.
        sign_off: Label → text.
        settings: Name of an edited setting → its new value.
        thetas: Reference → edited θJA [K/W] at sea level.
        board_class: Edited class of the board.
    """

    file: str = ""
    cells: Mapping[tuple[str, str], Cells] = field(default_factory=dict)
    parts: Mapping[tuple[str, str], tuple[str, str]] = field(default_factory=dict)
    draws: tuple[StatedDraw, ...] = ()
    notes: Mapping[tuple[str, str], str] = field(default_factory=dict)
    answers: Mapping[tuple[str, str, str], str] = field(default_factory=dict)
    sign_off: Mapping[str, str] = field(default_factory=dict)
    settings: Mapping[str, float] = field(default_factory=dict)
    thetas: Mapping[str, float] = field(default_factory=dict)
    board_class: BoardClass | None = None

    def applied_to(self, settings: Settings) -> Settings:
        """Settings with what was typed in place of what they said."""
        typed = {(draw.ref, draw.rail) for draw in self.draws}
        refs = {draw.ref for draw in self.draws if draw.ref}
        kept = tuple(d for d in settings.draws if (d.ref, d.rail) not in typed and not (d.ref in refs and not d.rail))
        parts = dict(settings.parts)
        for ref, theta in self.thetas.items():
            stated = parts.get(ref, PartStatement())
            parts[ref] = replace(stated, theta_ja=self._stated("θJA", theta, "K/W", "Regulators sheet"))
        return replace(
            settings,
            draws=(*kept, *self.draws),
            parts=parts,
            site=self._site(settings.site),
            policy=self._policy(settings.policy),
            board=self._board(settings.board),
        )

    def _stated(self, quantity: str, value: float, unit: str, where: str) -> Evidence:
        return Evidence(quantity, Span.exact(value), unit, f"{self.file} {where}", Grade.STATED)

    def _site(self, site: Site) -> Site:
        new = self.settings
        pairs = (
            ("ambient", site.ambient, "Ambient_nominal", "Ambient_high"),
            ("enclosure_rise", site.enclosure_rise, "Rise_nominal", "Rise_high"),
            ("altitude", site.altitude, None, "Altitude_high"),
        )
        changed: dict[str, Evidence] = {}
        source = f"{self.file} Settings sheet"
        for name, evidence, nominal_key, high_key in pairs:
            if high_key not in new and nominal_key not in new:
                continue
            high = new.get(high_key, evidence.span.high)
            nominal = new.get(nominal_key, evidence.span.nominal) if nominal_key else min(evidence.span.nominal, high)
            if high_key in new and (nominal_key is None or nominal_key not in new):
                nominal = min(nominal, high) if evidence.span.nominal != evidence.span.high else high
            high = max(high, nominal)
            span = Span(min(evidence.span.low, nominal), nominal, high)
            changed[name] = Evidence(evidence.quantity, span, evidence.unit, source, Grade.STATED)
        exponent = new.get("Altitude_exponent", site.altitude_exponent)
        return replace(
            site,
            ambient=changed.get("ambient", site.ambient),
            enclosure_rise=changed.get("enclosure_rise", site.enclosure_rise),
            altitude=changed.get("altitude", site.altitude),
            altitude_exponent=exponent,
        )

    def _board(self, board: Board) -> Board:
        if self.board_class is None:
            return board
        return replace(board, board_class=self.board_class, source=f"{self.file} Settings sheet")

    def _policy(self, policy: Policy) -> Policy:
        new = self.settings
        keys = {"Margin_over", "Margin_tight", "Policy_factor", "Policy_cap", "Policy_current"} & set(new)
        if not keys:
            return policy
        return replace(
            policy,
            junction_over=new.get("Margin_over", policy.junction_over),
            junction_tight=new.get("Margin_tight", policy.junction_tight),
            junction_factor=new.get("Policy_factor", policy.junction_factor),
            junction_cap=new.get("Policy_cap", policy.junction_cap),
            current_fraction=new.get("Policy_current", policy.current_fraction),
            source=f"{policy.source}, edited in {self.file}",
        )


NOTHING = Typed()


def read_typed(path: Path) -> Typed:
    """Read what was typed into a workbook of ours.

    Raises:
        InputError: If the file is none, is damaged or oversized, or a cell cannot be read; all cells at once.
    """
    check_archive(path)
    import openpyxl

    try:
        book = openpyxl.load_workbook(path, read_only=True, data_only=True)
    except Exception as error:  # openpyxl raises many kinds for a damaged file
        raise InputError(Fault("is no readable workbook", str(path), remedy="Save it again as .xlsx.")) from error
    try:
        needed = [name for name in ("Currents", "Findings", "Summary", "Settings") if name not in book.sheetnames]
        if needed:
            what = f"is no workbook of this program: it has no sheet '{needed[0]}'"
            raise InputError(Fault(what, str(path), remedy="Give a workbook that 'heatledger audit --workbook' wrote."))
        faults: list[Fault] = []
        typed = _currents(path, list(_rows(book["Currents"])), faults)
        answers = _answers(list(_rows(book["Findings"])))
        sign_off = _sign_off(book["Summary"])
        settings = _settings(path, list(_rows(book["Settings"])), faults)
        board_class = _board_class(path, list(_rows(book["Settings"])), faults)
        thetas = _thetas(path, list(_rows(book["Regulators"])), faults) if "Regulators" in book.sheetnames else {}
    finally:
        book.close()
    if faults:
        raise InputError(faults)
    return replace(typed, answers=answers, sign_off=sign_off, settings=settings, thetas=thetas, board_class=board_class)


Row = tuple[int, Mapping[str, Any]]


def _rows(sheet: Any) -> Iterator[Row]:
    """(row number as people count, head → value) of every row below the heads."""
    heads: list[str] = []
    for number, cells in enumerate(sheet.iter_rows(max_row=limits.TABLE_ROWS, values_only=True)):
        if number == HEAD_ROW:
            heads = ["" if cell is None else str(cell) for cell in cells]
        elif number > HEAD_ROW:
            yield number + 1, dict(zip(heads, cells, strict=False))


def _text(value: Any) -> str:
    return "" if value is None else str(value).strip()


def _currents(path: Path, rows: list[Row], faults: list[Fault]) -> Typed:
    cells: dict[tuple[str, str], Cells] = {}
    parts: dict[tuple[str, str], tuple[str, str]] = {}
    notes: dict[tuple[str, str], str] = {}
    draws: list[StatedDraw] = []
    for number, row in rows:
        rail, ref, key = _text(row.get("Rail")), _text(row.get("Part")), _text(row.get("Identity"))
        where = (key, rail)
        values = tuple(_plain(row.get(head)) for head in _TYPE_HEADS)
        note = _text(row.get("Your note"))
        if note:
            notes[where] = note
        if note or any(value is not None for value in values):
            parts[where] = (ref, _text(row.get("Value")))
        if all(value is None for value in values):
            continue
        cells[where] = (values[0], values[1], values[2])
        place = f"Currents!H{number}:J{number}"
        try:
            span, pulse = _current(values)
        except ValueError as error:
            faults.append(Fault(str(error), str(path), place))
            continue
        # named by part and rail, for rows move from one workbook to the next
        source = f"{path.name} Currents: {ref} on {rail}"
        evidence = Evidence("load current", span, "A", source, Grade.STATED, note=note)
        draws.append(StatedDraw("" if ref == "off-board" else ref, rail, evidence, pulse=pulse, key=key))
    return Typed(path.name, cells, parts, tuple(draws), notes)


def _plain(value: Any) -> object:
    if value is None or (isinstance(value, str) and not value.strip()):
        return None
    return value.strip() if isinstance(value, str) else value


def _current(values: tuple[object, ...]) -> tuple[Span, Pulse | None]:
    """The span that three cells mean: numbers are amperes, text has a unit; alone it may be a range or pulse."""
    given = [value for value in values if value is not None]
    if len(given) == 1 and isinstance(given[0], str):
        span, pulse = parse_load(given[0])
    else:
        low, nominal, high = (_amps(value) for value in values)
        known = [value for value in (low, nominal, high) if value is not None]
        low = known[0] if low is None else low
        high = known[-1] if high is None else high
        nominal = low + (high - low) / 2 if nominal is None else nominal
        if not low <= nominal <= high:
            raise ValueError(f"low, nominal and high must rise: {low:g}, {nominal:g}, {high:g} A")
        span, pulse = Span(low, nominal, high), None
    if span.low < 0:
        raise ValueError("a current that a part takes cannot be negative")
    return span, pulse


def _amps(value: object) -> float | None:
    if value is None:
        return None
    if isinstance(value, bool) or not isinstance(value, (int, float, str)):
        raise ValueError(f"'{value}' is no current; type amperes as a number, or text such as 120 mA")
    if isinstance(value, str):
        span = parse(value, Dimension.CURRENT)
        if not span.is_exact:
            raise ValueError(f"'{value}' is a range: type it alone, or one value in each cell")
        return span.nominal
    return float(value)


def _answers(rows: list[Row]) -> dict[tuple[str, str, str], str]:
    return {
        (_text(row.get("Finding")), _text(row.get("About")), _text(row.get("Identity"))): answer
        for _, row in rows
        if (answer := _text(row.get("Your answer")))
    }


def _sign_off(sheet: Any) -> dict[str, str]:
    found = {}
    for cells in sheet.iter_rows(max_row=200, max_col=2, values_only=True):
        if len(cells) == 2 and cells[0] in SIGN_OFF and (text := _text(cells[1])):
            found[str(cells[0])] = text
    return found


_NO_NUMBERS = frozenset({"Thin_air", "Edited", "Board_class", "Class_edited"})


def _board_class(path: Path, rows: list[Row], faults: list[Fault]) -> BoardClass | None:
    for number, row in rows:
        text = _text(row.get("Value"))
        if _text(row.get("Name in formulas")) != "Board_class" or text == _text(row.get("As audited")):
            continue
        known = [one.value for one in BoardClass]
        if text in known:
            return BoardClass(text)
        remedy = f"Type one of {', '.join(known)}."
        faults.append(Fault(f"'{text}' is no board class", str(path), f"Settings!B{number}", remedy))
    return None


def _settings(path: Path, rows: list[Row], faults: list[Fault]) -> dict[str, float]:
    found = {}
    for number, row in rows:
        name, value, before = _text(row.get("Name in formulas")), row.get("Value"), row.get("As audited")
        if not name or name in _NO_NUMBERS or value == before:
            continue
        if isinstance(value, (int, float)) and not isinstance(value, bool):
            found[name] = float(value)
        else:
            what = f"'{_text(value)}' is no number for {_text(row.get('Setting'))}"
            faults.append(Fault(what, str(path), f"Settings!B{number}", f"Type it in {_text(row.get('Unit'))}."))
    return found


def _thetas(path: Path, rows: list[Row], faults: list[Fault]) -> dict[str, float]:
    found = {}
    for number, row in rows:
        value, before = row.get("θ at sea level [K/W]"), row.get("θ as audited [K/W]")
        if value == before or before is None:
            continue
        if isinstance(value, (int, float)) and not isinstance(value, bool) and 0 < value < 2000:
            found[_text(row.get("Part"))] = float(value)
        else:
            faults.append(Fault(f"'{_text(value)}' is no θ in K/W", str(path), f"Regulators row {number}"))
    return found
