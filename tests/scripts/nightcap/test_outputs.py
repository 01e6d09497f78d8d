import csv
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from stand_ins import capacitance, met

from nightcap.comparison import Comparison
from nightcap.geometry.errors import Problem
from nightcap.outputs import OUTPUTS, write_outputs
from nightcap.outputs.picture import Picture
from nightcap.outputs.result_json import json_text
from nightcap.result import FAILED, Result, failed_result

KEYS = {
    "schema", "title", "case", "variant", "status", "conductors", "reference", "capacitance", "mutual_capacitance",
    "accuracy", "mesh", "seconds", "warnings", "provenance",
}  # fmt: skip


def written(result: Result, folder: Path) -> dict[str, object]:
    write_outputs(result, folder, "case.yaml", pictures=True)
    document: dict[str, object] = json.loads((folder / "result.json").read_text("utf-8"))
    return document


def test_json_carries_every_key_and_every_bit(tmp_path: Path) -> None:
    document = written(met(), tmp_path)
    assert set(document) >= KEYS
    C = document["capacitance"]
    assert isinstance(C, dict)
    assert (C["unit"], C["form"]) == ("F/m", "Maxwell")
    for name in ("value", "lower", "upper", "half_width"):
        assert_allclose(C[name], getattr(capacitance(), name), rtol=0.0)


def test_full_matrix_is_kept_where_conductors_are_tied_or_floating(tmp_path: Path) -> None:
    document = written(replace(met(), before_reduction=capacitance(3)), tmp_path)
    full = document["before_reduction"]
    assert isinstance(full, dict)
    assert full["conductors"] == ["w1", "w2", "w3"]
    assert np.shape(full["capacitance"]["lower"]) == (3, 3)


def test_failure_has_the_same_keys_and_its_messages(tmp_path: Path) -> None:
    problem = Problem("some/where/case.yaml", 7, "conductors.red.radius", "is negative")
    document = written(failed_result("case", (problem,)), tmp_path)
    assert set(document) >= KEYS
    assert document["status"] == FAILED
    assert document["errors"] == [
        {"file": "case.yaml", "line": 7, "key": "conductors.red.radius", "text": "is negative"}
    ]


def test_comparison_is_recorded(tmp_path: Path) -> None:
    comparison = Comparison(np.inf, 1e-4, "from memory", inside_bracket=False)
    document = written(replace(met(), comparison=comparison), tmp_path)
    assert document["expect"] == {
        "deviation": None, "tolerance": 1e-4, "source": "from memory", "inside_bracket": False, "agrees": False,
    }  # fmt: skip


def test_csv_has_one_line_per_entry_with_its_own_bounds(tmp_path: Path) -> None:
    write_outputs(met(), tmp_path, "case.yaml", pictures=True)
    content = (tmp_path / "result.csv").read_bytes()
    assert b"\r" not in content
    lines = list(csv.DictReader(content.decode().splitlines()))
    assert [(line["quantity"], line["row"], line["column"]) for line in lines] == [
        ("capacitance", "w1", "w1"), ("capacitance", "w1", "w2"), ("capacitance", "w2", "w1"),
        ("capacitance", "w2", "w2"), ("mutual_capacitance", "w1", "screen"), ("mutual_capacitance", "w1", "w2"),
        ("mutual_capacitance", "w2", "w1"), ("mutual_capacitance", "w2", "screen"),
    ]  # fmt: skip
    for line in lines:
        value, half_width = float(line["value"]), float(line["half_width"])
        assert_allclose([float(line["lower"]), float(line["upper"])], [value - half_width, value + half_width], rtol=0)


def test_failed_rerun_leaves_nothing_of_the_earlier_run(tmp_path: Path) -> None:
    write_outputs(met(), tmp_path, "case.yaml", pictures=True)
    (tmp_path / "picture.png").touch()
    (tmp_path / ".result.csv.123.part").touch()
    write_outputs(failed_result("case", ()), tmp_path, "case.yaml", pictures=True)
    assert [path.name for path in tmp_path.iterdir()] == ["result.json"]


def test_picture_that_cannot_be_drawn_is_a_warning(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(Picture, "applies", lambda self, result: True)  # noqa: ARG005
    monkeypatch.setattr(Picture, "write", lambda self, result, folder: 1 / 0)  # noqa: ARG005
    result = write_outputs(met(), tmp_path, "case.yaml", pictures=True)
    assert result.status == "met"
    assert result.warnings == ("picture.png was not written: ZeroDivisionError: division by zero",)
    assert json.loads((tmp_path / "result.json").read_text())["warnings"] == list(result.warnings)


@pytest.mark.parametrize("output", [output for output in OUTPUTS if output.is_essential], ids=lambda o: o.file)
def test_numbers_that_cannot_be_written_fail_the_case(
    output: object, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*_: object) -> None:
        raise OSError("disk full")

    monkeypatch.setattr(type(output), "write", full)
    result = write_outputs(met(), tmp_path, "case.yaml", pictures=True)
    assert result.status == FAILED
    assert str(result.problems[-1]) == "case.yaml: the result could not be written: disk full"
    assert not list(tmp_path.iterdir())


def test_file_in_the_place_of_the_result_folder_fails_the_case(tmp_path: Path) -> None:
    (tmp_path / "case").touch()
    assert write_outputs(met(), tmp_path / "case", "case.yaml", pictures=True).status == FAILED


def test_json_puts_a_row_on_a_line_and_refuses_what_json_cannot_say() -> None:
    value = {"a": [[1.5, 2], [3, 4]], "b": {}, "c": None, "d": "µ"}
    assert json.loads(json_text(value)) == value
    assert "    [1.5, 2],\n" in json_text(value)
    with pytest.raises(ValueError, match="not JSON compliant"):
        json_text([float("nan")])
