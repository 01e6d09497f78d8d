import hashlib
import json
import sys
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace

import pytest
from stand_ins import screened_pair

from nightcap.geometry.case import Case
from nightcap.geometry.errors import CaseError, MeshError, Problem
from nightcap.jobs import Job
from nightcap.result import Result
from nightcap.work import Work

JOB = Job("tail/screened.yaml", "screened")


@pytest.fixture
def from_memory(monkeypatch: pytest.MonkeyPatch) -> Callable[[Exception | None], None]:
    """Makes the reader give the screened pair, or raise."""

    def install(error: Exception | None) -> None:
        def read_case(_: Path) -> Case:
            if error:
                raise error
            return screened_pair()[0]

        monkeypatch.setitem(sys.modules, "nightcap.geometry.case_file", SimpleNamespace(read_case=read_case))
        layout = SimpleNamespace(build_layout=lambda _: screened_pair()[1])
        monkeypatch.setitem(sys.modules, "nightcap.geometry.build_layout", layout)

    return install


def worked(out: Path, accuracy: float | None = None) -> tuple[Result, list[str]]:
    said: list[str] = []
    return Work(out, accuracy, pictures=False)(JOB, said.append), said


def test_case_is_solved_to_the_accuracy_of_the_command_line(
    from_memory: Callable[[Exception | None], None], tmp_path: Path
) -> None:
    from_memory(None)
    result, _ = worked(tmp_path, 1e-3)
    assert (result.status, result.requested, result.drawing) == ("met", 1e-3, None)
    assert result.reached is not None
    assert result.reached <= 1e-3
    document = json.loads((tmp_path / "screened/result.json").read_text())
    assert document["conductors"] == ["red", "white"]
    assert document["accuracy"]["requested"] == 1e-3
    assert document["mesh"]["rounds"] == len(document["rounds"]) >= 1
    assert {"mesh", "solve", "total"} <= set(document["seconds"])
    assert "before_reduction" not in document


@pytest.mark.parametrize(
    ("error", "message"),
    [
        (CaseError([Problem("tail/screened.yaml", 3, "units", "is wrong")]), "tail/screened.yaml:3: units: is wrong"),
        (MeshError("no valid mesh"), "tail/screened.yaml: no valid mesh"),
        (MemoryError(), "tail/screened.yaml: out of memory"),
        (OSError("gone"), "tail/screened.yaml: gone"),
    ],
)
def test_every_failure_becomes_a_result_with_its_message(
    error: Exception, message: str, from_memory: Callable[[Exception | None], None], tmp_path: Path
) -> None:
    from_memory(error)
    result, _ = worked(tmp_path)
    assert result.status == "failed"
    assert [str(problem) for problem in result.problems] == [message]
    assert json.loads((tmp_path / "screened/result.json").read_text())["status"] == "failed"


def test_mistake_of_the_program_names_its_place(
    from_memory: Callable[[Exception | None], None], tmp_path: Path
) -> None:
    from_memory(KeyError("red"))
    result, _ = worked(tmp_path)
    assert "internal error at test_work.py:" in result.problems[0].text
    assert "KeyError: 'red'" in result.problems[0].text


def test_provenance_names_the_list_of_materials_beside_the_case(tmp_path: Path) -> None:
    (tmp_path / "stock.materials.yaml").write_text("wax: {permittivity: 2.2}\n")
    (tmp_path / "coax.yaml").write_text(
        "materials: stock.materials.yaml\naccuracy: 1 %\nbackground: {material: wax}\n"
        "conductors: {core: {shape: circle, radius: 1}}\nboundary: {kind: shield, shape: circle, radius: 3}\n"
    )
    result = Work(tmp_path / "out", pictures=False)(Job(str(tmp_path / "coax.yaml"), "coax"), lambda _: None)
    told = json.loads((tmp_path / "out/coax/result.json").read_text())["provenance"]
    digest = hashlib.sha256((tmp_path / "stock.materials.yaml").read_bytes()).hexdigest()
    assert (result.status, told["other_files_sha256"]) == ("met", {"stock.materials.yaml": digest})
    assert told["case_sha256"] == hashlib.sha256((tmp_path / "coax.yaml").read_bytes()).hexdigest()
