"""Package family from footprint names as KiCad, IPC-7351 and people write them."""

from __future__ import annotations

import pytest

from analyzer.recognise import load_rulebook
from analyzer.recognise.package import read_package

PACKAGES = load_rulebook().packages


@pytest.mark.parametrize(
    ("footprint", "family"),
    [
        ("Package_TO_SOT_SMD:SOT-23-5", "SOT-23-5"),
        ("Package_TO_SOT_SMD:TSOT-23-5", "SOT-23-5"),
        ("own:SOT95P280X145-6N", "SOT-23-5"),
        ("own:SOT95P280X145-5N", "SOT-23-5"),
        ("own:SOT-25", "SOT-23-5"),
        ("own:TSOP-5", "SOT-23-5"),
        ("own:SOT23-5", "SOT-23-5"),
        ("Package_TO_SOT_SMD:SOT-23", "SOT-23-3"),
        ("Package_TO_SOT_SMD:SOT-353_SC-70-5", "SC-70"),
        ("Package_TO_SOT_SMD:SOT-223-3_TabPin2", "SOT-223"),
        ("own:SOT223", "SOT-223"),
        ("Package_TO_SOT_SMD:TO-252-3_TabPin2", "TO-252"),
        ("own:DPAK", "TO-252"),
        ("own:D2PAK", "TO-263"),
        ("Package_TO_SOT_SMD:TO-263-5_TabPin3", "TO-263"),
        ("Package_SO:SOIC-8_3.9x4.9mm_P1.27mm", "SOIC-8"),
        ("Package_SO:SOIC-8-1EP_3.9x4.9mm_P1.27mm_EP2.29x3mm_ThermalVias", "SOIC-8-EP"),
        ("Package_SO:MSOP-8_3x3mm_P0.65mm", "MSOP-8"),
        ("Package_SO:TSSOP-8_3x3mm_P0.65mm", "MSOP-8"),
        ("Package_SO:HTSSOP-16-1EP_4.4x5mm_P0.65mm_EP3.4x5mm", "TSSOP-EP"),
        ("Package_SON:WSON-6-1EP_2x2mm_P0.65mm_EP1x1.6mm", "DFN-2x2"),
        ("own:DFN-6-1EP_2x2mm", "DFN-2x2"),
        ("Package_DFN_QFN:QFN-20-1EP_4x4mm_P0.5mm_EP2.5x2.5mm", "QFN"),
        ("Package_TO_SOT_THT:TO-220-3_Vertical", "TO-220"),
        ("Package_TO_SOT_THT:TO-92_Inline", "TO-92"),
        ("own:CONV_MODULE", None),
        ("", None),
    ],
)
def test_family(footprint: str, family: str | None) -> None:
    assert read_package(footprint, PACKAGES).family == family


def test_pad_vias_and_tab_are_read() -> None:
    package = read_package("Package_SO:SOIC-8-1EP_3.9x4.9mm_P1.27mm_EP2.29x3mm_ThermalVias", PACKAGES)
    assert (package.has_pad, package.has_vias, package.tab_pin) == (True, True, None)
    package = read_package("Package_TO_SOT_SMD:SOT-223-3_TabPin2", PACKAGES)
    assert (package.has_pad, package.has_vias, package.tab_pin) == (False, False, "2")


def test_generic_figures_are_unverified_and_never_better_on_a_poorer_board() -> None:
    for package in PACKAGES:
        thetas = [theta.span.nominal for theta in package.theta_ja.values()]
        assert thetas[0] >= thetas[-1], package.family
        assert all(theta.grade.value == "presumed" for theta in package.theta_ja.values())
