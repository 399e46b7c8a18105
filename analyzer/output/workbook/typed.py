"""What a person typed into a workbook, keyed by part identity and rail, and how it changes the settings.

`typed_reading` reads it from the file.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from typing import NamedTuple

from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rule import BoardClass
from analyzer.settings import Board, PartStatement, Policy, Settings, Site, StatedDraw

Cells = tuple[object, object, object]


class Answered(NamedTuple):
    """The finding that an answer was given to, as its row names it."""

    finding: str
    subject: str
    identity: str
    what: str
    where: str


@dataclass(frozen=True)
class Typed:
    """What was typed into a workbook.

    Attributes:
        file: The workbook.
        cells: (identity, rail) → the three current cells as typed, numbers or text.
        parts: (identity, rail) → reference and value, to name what is gone.
        draws: The same as stated draws.
        notes: (identity, rail) → note.
        answers: The finding → answer.
        sign_off: Label → text.
        settings: Name of a typed setting → its value.
        thetas: Reference → typed θJA [K/W] at sea level.
        board_class: Typed class of the board.
        applied: Whether the audit that is written down took all this in, or it is only carried on.
    """

    file: str = ""
    cells: Mapping[tuple[str, str], Cells] = field(default_factory=dict)
    parts: Mapping[tuple[str, str], tuple[str, str]] = field(default_factory=dict)
    draws: tuple[StatedDraw, ...] = ()
    notes: Mapping[tuple[str, str], str] = field(default_factory=dict)
    answers: Mapping[Answered, str] = field(default_factory=dict)
    sign_off: Mapping[str, str] = field(default_factory=dict)
    settings: Mapping[str, float] = field(default_factory=dict)
    thetas: Mapping[str, float] = field(default_factory=dict)
    board_class: BoardClass | None = None
    applied: bool = True

    @property
    def changes_budgets(self) -> bool:
        """Whether anything was typed that a budget depends on."""
        return bool(self.cells or self.settings or self.thetas or self.board_class)

    @property
    def waits(self) -> bool:
        """Whether a budget depends on something typed that the audit did not take in."""
        return self.changes_budgets and not self.applied

    def lacks(self, other: Typed) -> Iterator[str]:
        """Names of what was typed in another workbook and not in this one."""
        told = {where: f"{ref or 'off-board'} on {where[1]}" for where, (ref, _) in other.parts.items()}
        yield from (told[where] for where in other.cells if where not in self.cells)
        yield from (f"the note to {told[where]}" for where in other.notes if where not in self.notes)
        answered = {one[:3] for one in self.answers}
        yield from (f"{one.finding} of {one.subject}" for one in other.answers if one[:3] not in answered)
        yield from (label for label in other.sign_off if label not in self.sign_off)
        yield from (name for name in other.settings if name not in self.settings)
        yield from (f"θ of {ref}" for ref in other.thetas if ref not in self.thetas)
        if other.board_class is not None and self.board_class is None:
            yield "the board class"

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
