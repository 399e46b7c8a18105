"""The package for KiCad's content manager, against the public schemas that KiCad itself ships."""

from __future__ import annotations

import io
import json
import zipfile
from pathlib import Path

import jsonschema
import pytest
from conftest import need

from analyzer.kicad import package

SCHEMAS = Path("/opt/kicad9/usr/share/kicad/schemas")


@pytest.mark.outside
@pytest.mark.parametrize(
    ("schema", "document"),
    [("pcm.v1.schema.json", package.metadata()), ("api.v1.schema.json", package.plugin())],
)
def test_the_descriptions_fit_kicads_own_schemas(schema: str, document: dict[str, object]) -> None:
    text = need(SCHEMAS / schema).read_text(encoding="utf-8")
    jsonschema.Draft7Validator(json.loads(text)).validate(document)


def test_the_archive_holds_what_the_content_manager_installs_and_nothing_else() -> None:
    with zipfile.ZipFile(io.BytesIO(package.build())) as archive:
        assert archive.namelist() == [
            "metadata.json",
            "plugins/kicad_plugin.py",
            "plugins/plugin.json",
            "resources/icon.png",
        ]
        script = archive.read("plugins/kicad_plugin.py").decode("utf-8")
    assert "@package" in script
    assert '"%I" "%O.xlsx"' in script


def test_the_icon_has_the_size_the_content_manager_asks_for() -> None:
    # PNG, RFC 2083: width and height are the first eight bytes of the IHDR chunk
    assert package.icon()[16:24] == (64).to_bytes(4, "big") * 2


def test_the_same_version_gives_the_same_bytes() -> None:
    assert package.build() == package.build()
