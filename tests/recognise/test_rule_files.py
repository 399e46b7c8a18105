"""Loading rule files: every fault at once, limits, precedence, the schema."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path

import jsonschema
import pytest
from recognise_kit import QX1200, rules

from analyzer.errors import InputError
from analyzer.evidence import Grade
from analyzer.recognise import load_rulebook
from analyzer.recognise.rulebook import shipped_files
from analyzer.recognise.schema import rules_schema, schema_text
from analyzer.shipped import rules_folder


def test_figures_are_read_with_unit_source_and_grade(tmp_path: Path) -> None:
    rule = load_rulebook([rules(tmp_path, QX1200)]).rules[0]
    dropout = rule.channels[0].figures["dropout"]
    assert dropout.span.corners == (1.1, 1.1, 1.3)
    assert (dropout.unit, dropout.grade, dropout.source) == ("V", Grade.RULED, "own.toml [QX1200]: QX1200 data sheet")
    assert rule.thermal[0].theta_ja is not None
    assert rule.thermal[0].theta_ja.span.nominal == 91
    assert rule.is_user


def test_figures_from_memory_are_presumed_only(tmp_path: Path) -> None:
    text = QX1200.replace('source = "QX1200 data sheet"', 'source = "from memory"\nverified = false')
    rule = load_rulebook([rules(tmp_path, text)]).rules[0]
    assert rule.channels[0].figures["dropout"].grade is Grade.PRESUMED
    assert rule.thermal[0].theta_ja is not None
    assert rule.thermal[0].theta_ja.grade is Grade.PRESUMED


def test_all_faults_of_all_files_are_listed(tmp_path: Path) -> None:
    bad = QX1200.replace("dropout", "dropuot").replace('"decimal"', '"decimals"').replace("91 K/W", "91")
    other = '[[rule]]\nname = "x"\nkind = "linaer"\nmatch = [{ pattern = "*" }]\n'
    with pytest.raises(InputError) as error:
        load_rulebook([rules(tmp_path, bad), rules(tmp_path, other, "other.toml")])
    text = str(error.value)
    assert "did you mean 'dropout'?" in text
    assert "did you mean 'decimal'?" in text
    assert "did you mean 'linear'?" in text
    assert "'91'" in text
    assert "matches every name" in text
    assert text.count("own.toml") >= 3
    assert text.count("other.toml") >= 2


@pytest.mark.parametrize(
    ("old", "new", "what"),
    [
        ('"1.1/1.3 V"', '"1.3 A"', "1.3 A"),
        ('"1.1/1.3 V"', "1.3", "has no unit"),
        ('"1.1/1.3 V"', '[["1 A", "1 V"], ["0.5 A", "2 V"]]', "rising"),
        ('kind = "linear"', "", "is missing"),
        ("{maker}1200-{code}*", "{code}1200-{code}*", "once"),
        ("{maker}1200-{code}*", "{maker}" + "1" * 100, "longer than 80"),
        ('name = "QX1200"', "name = 3", "must be text"),
        (', decode = "decimal"', "", "how does {code} read"),
    ],
)
def test_single_faults(tmp_path: Path, old: str, new: str, what: str) -> None:
    with pytest.raises(InputError, match=what.replace("{", r"\{")):
        load_rulebook([rules(tmp_path, QX1200.replace(old, new))])


def test_same_name_twice_is_a_fault(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="two rules have this name"):
        load_rulebook([rules(tmp_path, QX1200 + QX1200)])


def test_missing_file_is_one_clear_error(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="cannot be read"):
        load_rulebook([tmp_path / "absent.toml"])


def test_broken_toml_names_the_line(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="line 2"):
        load_rulebook([rules(tmp_path, '[[rule]]\nname = "a\n')])


def test_too_many_rules_are_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("analyzer.limits.RULES", 3)
    with pytest.raises(InputError, match="more than 3 rules"):
        load_rulebook()


def test_schema_file_is_the_generated_one() -> None:
    assert (rules_folder() / "rules.schema.json").read_text(encoding="utf-8") == schema_text()


def test_shipped_files_validate_against_the_schema() -> None:
    validator = jsonschema.Draft202012Validator(json.loads(schema_text()))
    jsonschema.Draft202012Validator.check_schema(rules_schema())
    files = shipped_files(rules_folder())
    assert len(files) >= 6
    for file in files:
        validator.validate(tomllib.loads(file.read_text(encoding="utf-8")))


def test_schema_refuses_what_the_loader_refuses(tmp_path: Path) -> None:
    validator = jsonschema.Draft202012Validator(rules_schema())
    assert validator.is_valid(tomllib.loads(QX1200))
    for old, new in (("dropout", "dropuot"), ('"linear"', '"linaer"'), ('"SOT-223"', "5"), ('"1.1/1.3 V"', "1.3")):
        assert not validator.is_valid(tomllib.loads(QX1200.replace(old, new)))


def test_every_shipped_figure_has_a_source() -> None:
    book = load_rulebook()
    for rule in book.rules:
        assert rule.source, rule.where
        assert all(figure.source for figure in rule.thermal), rule.where
        assert not (rule.verified and "memory" in rule.source), rule.where
        for figure in rule.thermal:
            assert not (figure.verified and "memory" in figure.source), rule.where


def test_every_thermal_package_is_a_known_family() -> None:
    book = load_rulebook()
    families = {package.family for package in book.packages}
    assert {figure.package for rule in book.rules for figure in rule.thermal} <= families


@pytest.mark.parametrize(
    ("figure", "what"),
    [
        ('forward_drop = "-0.5 V"', "'-0.5 V' lies outside the possible: at least 0 V"),
        ('on_resistance = "0 Ω"', "'0 Ω' lies outside the possible: above 0 Ω"),
        ('efficiency = "100 %"', "'100 %' lies outside the possible: above 0 %, at most 99.9 %"),
        ('efficiency = [["0.1 A", "50 %"], ["1 A", "100 %"]]', "has a value outside the possible"),
        ('efficiency_map = [["1 A", "5 V", "120 %"]]', "'120 %' at '1 A' is no efficiency at a load"),
        ('control_ratio = "0"', "lies outside the possible: above 0 %"),
        ('pass_channels = "1000"', "lies outside the possible: at least 100 %"),
        ('junction_max = "1250 °C"', "lies outside the possible"),
    ],
)
def test_figures_that_no_part_has_are_refused(figure: str, what: str, tmp_path: Path) -> None:
    head = '[[rule]]\nname = "Q"\nkind = "buck"\nmatch = [{ pattern = "QX1" }]\nsource = "invented"\n'
    (tmp_path / "r.toml").write_text(head + figure + "\n", encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load_rulebook([tmp_path / "r.toml"])
    assert what in str(caught.value)


@pytest.mark.parametrize(
    ("line", "what"),
    [
        ('theta_ja = "0 K/W"', "'0 K/W' lies outside the possible: above 0 K/W"),
        ('foster = [["0 K/W", "1 s"]]', "0 K/W, 1 s is no stage"),
        ('copper = [["100 mm²", "60 K/W"], ["300 mm²", "0 K/W"]]', "has a value outside the possible"),
    ],
)
def test_thermal_figures_that_no_part_has_are_refused(line: str, what: str, tmp_path: Path) -> None:
    head = '[[rule]]\nname = "Q"\nkind = "buck"\nmatch = [{ pattern = "QX1" }]\nsource = "invented"\n'
    thermal = f'[[rule.thermal]]\npackage = "SOT-223"\n{line}\n'
    (tmp_path / "r.toml").write_text(head + thermal, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load_rulebook([tmp_path / "r.toml"])
    assert what in str(caught.value)
