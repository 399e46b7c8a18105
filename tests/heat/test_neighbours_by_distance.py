"""A stated distance informs, a stated resistance counts.

Figures: the published plate estimate for one 35 µm plane, both faces cooled with 20 W/(m²·K), 12.9 K/W at 10 mm.
"""

from __future__ import annotations

from pathlib import Path

import pytest
from conftest import ROOT

from analyzer.audit import Audit, audit
from analyzer.heat.coupling import plane_estimate

BOARD = ROOT / "fixture_boards" / "seedling_bench"


@pytest.mark.parametrize(("millimetres", "kelvin_per_watt"), [(5, 19.9), (10, 12.9), (20, 6.8), (30, 3.9)])
def test_the_plane_estimate_is_the_published_one(millimetres: float, kelvin_per_watt: float) -> None:
    assert plane_estimate(millimetres / 1000) == pytest.approx(kelvin_per_watt, abs=0.06)


def audited(folder: Path, coupling: str) -> Audit:
    text = (BOARD / "heatledger.toml").read_text(encoding="utf-8")
    settings = folder / "heatledger.toml"
    settings.write_text(f"{text}\n[[coupling]]\nref = 'U2'\nby = 'U5'\n{coupling}\n", encoding="utf-8")
    (folder / "rules.toml").write_bytes((BOARD / "rules.toml").read_bytes())
    return audit(BOARD, settings_file=settings)


def junction(result: Audit) -> float:
    (entry,) = [entry for entry in result.ledger.entries if entry.ref == "U2"]
    assert entry.worst is not None
    assert entry.worst.junction is not None
    return entry.worst.junction


def test_a_distance_informs_and_a_resistance_counts(tmp_path: Path) -> None:
    alone = junction(audit(BOARD))
    near = audited(tmp_path, "distance = '10 mm'")
    assert junction(near) == alone
    told = {finding.subject: finding.message for finding in near.ledger.findings if finding.name == "neighbour-heat"}
    # U5 makes 1.371 W by hand (EXPECTED.md): 12.9 K/W · 1.371 W = 17.7 K
    assert told["U2"].endswith("would warm U2 by about 18 K (information only)")
    coupled = audited(tmp_path, "theta = '12.9 K/W'")
    assert junction(coupled) - alone == pytest.approx(12.9 * 1.371413, abs=1e-3)
