"""Pin roles by pin name. Names are those counted in KiCad's libraries; a rule may name others for its part."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping

from analyzer.circuit import Pin, plain_name
from analyzer.rule import Role

_NAMES: Mapping[Role, str] = {
    Role.INPUT: "IN VI VIN INPUT I VINA VINX PVIN AVIN SVIN IVIN VINP +VIN VIN+ +IN VCC VDD V+ VSUP VSUPPLY VS VPP"
    " VBATIN VP VPWR UIN VUSB VINSW VINB",
    Role.OUTPUT: "OUT VO VOUT OUTPUT Q VOUTX +VOUT VOUT+ +VO VO+ +OUT UOUT VREG OUTP VOUTP VSYS SYS",
    Role.GROUND: "GND EP PAD GND/HS VSS PGND AGND GNDA SGND DGND EXP TAB THERMAL EPAD GND/TAB GNDP CGND 0V -VIN VIN-"
    " -VOUT VOUT- PWPD POWERPAD COM -VO VO- RTN THERMALPAD EXPAD GND_PAD GNDPAD V- VEE",
    Role.FEEDBACK: "ADJ FB VFB FEEDBACK FDB FBX VADJ ADJUST ADJ/GND GND/ADJ NFB FB/VO FB/VOUT INV TRIM ADJ/NC",
    Role.SENSE: "SENSE SNS VO_S VTAP OUTS VOS VSENSE OUTSENSE VOUTSENSE VOSNS VOUTS VSNS SNS+ SENSE+"
    " VOUT_S OUT_S VO_SNS",
    Role.SET: "SET VSET ISET PROG RSET ILIM RLIM OCSET",
    Role.SWITCH: "SW LX VSW PHASE PH SWITCH L SWN SWP SWC SWX LXX",
    Role.ENABLE: "EN SHDN ON/OFF CTRL INH SHTD CE SHUTDOWN RUN EN/UVLO ENABLE ON OFF SD STBY EN/SYNC EN/SHDN ON/OFFN"
    " CONTROL ENA EN/FAULT UVLO EN/MODE NSHDN NSD XSHDN",
    Role.BIAS: "BP BYP NR BYPASS CC BIAS VCONTROL NR/SS SS COMP CBYP REF VREF VBIAS VCTRL VCNTL VL INTVCC BYP/FB SS/TR",
    Role.BOOTSTRAP: "BST BOOT CB BOOST VBST BS CBOOT BOOTSTRAP VBOOT BSTX CBST",
}
_ROLE_OF: Mapping[str, Role] = {name: role for role, names in _NAMES.items() for name in names.split()}

_NUMBERED = re.compile(r"(?P<stem>[A-Z+/_-]+?)_?(?P<number>\d{1,2}|[AB])")


def role_of(pin: Pin) -> Role:
    """Role of a pin by its name; OTHER when the name says nothing."""
    name = plain_name(pin.name).upper().replace(" ", "").strip("!#~/")
    if name in _ROLE_OF:
        return _ROLE_OF[name]
    numbered = _NUMBERED.fullmatch(name)
    if numbered and numbered["stem"] in _ROLE_OF and numbered["number"].isdigit():
        return _ROLE_OF[numbered["stem"]]
    return Role.OTHER


def channel_number(pin: Pin) -> str:
    """The number behind a pin's name that tells the outputs of a part apart: "FB2" → "2", "FB" → ""."""
    numbered = _NUMBERED.fullmatch(plain_name(pin.name).upper().replace(" ", ""))
    return numbered["number"] if numbered and numbered["stem"] in _ROLE_OF else ""


def by_role(pins: Iterable[Pin], named: Mapping[Role, tuple[str, ...]] | None = None) -> dict[Role, tuple[Pin, ...]]:
    """Pins by role; names or numbers a rule gives beat the general list."""
    named = named or {}
    special = {text.upper(): role for role, texts in named.items() for text in texts}
    found: dict[Role, list[Pin]] = {}
    for pin in pins:
        name = plain_name(pin.name).upper().replace(" ", "")
        role = special.get(name) or special.get(pin.number.upper()) or role_of(pin)
        if named and special and role in named and name not in special and pin.number.upper() not in special:
            # where a rule lists the pins of a role, other pins of that usual name have another job
            role = Role.OTHER
        found.setdefault(role, []).append(pin)
    return {role: tuple(members) for role, members in found.items()}
