"""The lists that the program prints: materials, and the schema of a case file."""

import json

import pytest

from nightcap.command import main


def test_materials_fit_the_terminal(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["materials"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert max(map(len, lines)) <= 80
    assert any(line.startswith("polyethylene") and "2.26" in line for line in lines)
    assert any(line.startswith("copper") and "5.8e+07" in line for line in lines)
    assert "licensed practice" in " ".join(lines)


def test_materials_with_a_word(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["materials", "ptfe"]) == 0
    out = capsys.readouterr().out
    assert "PTFE" in out
    assert "copper" not in out


def test_a_word_that_none_has(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["materials", "unobtainium"]) == 1
    assert "no material" in capsys.readouterr().err


def test_sources_are_shown(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["materials", "semi-solid"]) == 0
    assert "    eps_r: found: cable makers' tables" in capsys.readouterr().out.splitlines()


def test_materials_as_json(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["materials", "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    by_name = {one["name"]: one for one in told["insulations"]}
    assert by_name["polyethylene"]["loss_tangent"]["frequency"] == 60
    assert {one["name"]: one for one in told["metals"]}["copper"]["conductivity"]["value"] == 58e6
    assert "licensed practice" in told["caution"]


def test_schema_is_printed_as_json(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["schema"]) == 0
    assert "conductors" in json.loads(capsys.readouterr().out)["properties"]
