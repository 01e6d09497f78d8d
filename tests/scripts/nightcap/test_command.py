import json
import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest
from stand_ins import Moody

import nightcap.run
from nightcap import __version__
from nightcap.arguments import accuracy
from nightcap.command import main

TESTS = Path(__file__).parents[2]


@pytest.fixture
def moody(monkeypatch: pytest.MonkeyPatch) -> None:
    """The cases do what their names say."""
    monkeypatch.setattr(nightcap.run, "Work", Moody)


def files(folder: Path, *names: str) -> list[str]:
    for name in names:
        (folder / f"{name}.yaml").touch()
    return [str(folder / f"{name}.yaml") for name in names]


def test_version(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="0"):
        main(["--version"])
    assert capsys.readouterr().out == f"nightcap {__version__}\n"


@pytest.mark.parametrize("words", [["--help"], ["run", "--help"], ["check", "--help"]])
def test_help_has_examples(words: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="0"):
        main(words)
    assert "examples:" in capsys.readouterr().out


@pytest.mark.parametrize(
    "words",
    [
        [], ["walk"], ["run", "a.yaml"], ["run", "--out", "x"], ["run", "a.yaml", "--out", "x", "--accuracy", "2"],
        ["run", "a.yaml", "--out", "x", "--jobs", "0"], ["check"],
    ],
)  # fmt: skip
def test_wrong_words_leave_with_2(words: list[str]) -> None:
    with pytest.raises(SystemExit, match="2"):
        main(words)


@pytest.mark.parametrize(("text", "value"), [("1e-4", 1e-4), ("0.01 %", 1e-4), ("0.01%", 1e-4)])
def test_accuracy_is_read_as_a_fraction_or_per_cent(text: str, value: float) -> None:
    assert accuracy(text) == pytest.approx(value, rel=1e-15)


def test_unreadable_path_leaves_with_2_before_anything_runs(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (good,) = files(tmp_path, "good")
    assert main(["run", good, str(tmp_path / "none.yaml"), "--out", str(tmp_path / "out")]) == 2
    assert "no such file or folder" in capsys.readouterr().err
    assert not (tmp_path / "out").exists()
    assert main(["check", str(tmp_path / "none.yaml")]) == 2


def test_file_in_the_place_of_the_output_folder_leaves_with_2(tmp_path: Path) -> None:
    (good,) = files(tmp_path, "good")
    assert main(["run", good, "--out", good]) == 2


@pytest.mark.usefixtures("moody")
@pytest.mark.parametrize(("names", "code"), [(["good"], 0), (["good", "fail"], 1), (["fail", "die"], 1)])
def test_exit_code_tells_whether_all_are_met(
    names: list[str], code: int, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["run", *files(tmp_path, *names), "--out", str(tmp_path / "out"), "--jobs", "1"]) == code
    captured = capsys.readouterr()
    assert f"[1/{len(names)}] {names[0]}\n" in captured.err
    assert f"{len(names)} case" in captured.out
    assert ("fail.yaml: as asked" in captured.err) == ("fail" in names)


def test_help_loads_nothing_heavy() -> None:
    code = (
        "import sys, nightcap.command as c; c.build_parser().format_help();"
        "print([m for m in ('numpy', 'scipy', 'gmsh', 'matplotlib', 'pydantic', 'rich', 'yaml') if m in sys.modules])"
    )
    assert subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout == "[]\n"


PROGRAM = """
import sys
sys.path.insert(0, {tests!r})
import nightcap.run, stand_ins
from nightcap.command import main
nightcap.run.Work = stand_ins.Moody
sys.exit(main(sys.argv[1:]))
"""


def start(*words: str) -> subprocess.Popen[str]:
    command = [sys.executable, "-c", PROGRAM.format(tests=str(TESTS)), *words]
    return subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True)


def test_interruption_says_so_and_leaves_with_130(tmp_path: Path) -> None:
    with start("run", *files(tmp_path, "sleep1", "sleep2"), "--out", str(tmp_path / "out"), "--jobs", "2") as process:
        assert process.stderr is not None
        assert process.stderr.readline() == "[1/2] sleep1\n"
        assert process.stderr.readline() == "[2/2] sleep2\n"
        os.killpg(process.pid, signal.SIGINT)  # as a terminal does: to all processes
        _, err = process.communicate(timeout=30)
    assert process.returncode == 130
    assert err == "nightcap: interrupted; finished cases have their results\n"


def test_reader_that_goes_away_does_not_stop_the_work(tmp_path: Path) -> None:
    with start("run", *files(tmp_path, "good", "fail"), "--out", str(tmp_path / "out"), "--jobs", "1") as process:
        assert process.stdout is not None
        process.stdout.close()
        assert process.stderr is not None
        err = process.stderr.read()
    assert process.returncode == 1
    assert "[2/2] fail" in err
    assert "Traceback" not in err


CASE = """\
title: Round core in a round screen
conductors:
  core: {shape: circle, radius: 1 mm}
boundary: {kind: shield, name: screen, shape: circle, radius: 2 mm}
accuracy: 1e-6
expect:
  relative: [[9.06472028365439]]  # 2 pi / ln 2
  tolerance: 1e-6
  source: Maxwell, Treatise
"""


@pytest.fixture
def coax(tmp_path: Path) -> Path:
    path = tmp_path / "coax.yaml"
    path.write_text(CASE)
    return path


def test_case_file_becomes_a_result_folder(coax: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["run", str(coax), "--out", str(tmp_path / "out")]) == 0
    assert {path.name for path in (tmp_path / "out/coax").iterdir()} == {"result.json", "result.csv", "picture.png"}
    document = json.loads((tmp_path / "out/coax/result.json").read_text())
    assert document["status"] == "met"
    assert document["expect"]["agrees"]
    assert len(document["provenance"]["case_sha256"]) == 64
    out = capsys.readouterr().out
    assert "80.26073" in out  # 9.06472028365439 eps0 in pF/m
    assert "agrees with the expected matrix" in out


def test_value_that_is_not_as_expected_leaves_with_1(
    coax: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    coax.write_text(CASE.replace("9.064", "9.063"))
    assert main(["run", str(coax), "--out", str(tmp_path / "out"), "--no-pictures"]) == 1
    assert "DISAGREES" in capsys.readouterr().out
    assert not (tmp_path / "out/coax/picture.png").exists()
    assert json.loads((tmp_path / "out/coax/result.json").read_text())["status"] == "met"


def test_mistake_in_a_file_is_shown_with_its_line_and_recorded(
    coax: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    coax.write_text(CASE.replace("radius: 1 mm", "radius: -1 mm"))
    assert main(["run", str(coax), "--out", str(tmp_path / "out")]) == 1
    assert f"{coax}:3: conductors.core.radius: " in capsys.readouterr().err
    document = json.loads((tmp_path / "out/coax/result.json").read_text())
    assert (document["status"], document["errors"][0]["line"]) == ("failed", 3)
    assert main(["check", str(coax)]) == 1


def test_check_says_what_it_understood(coax: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(coax)]) == 0
    out = capsys.readouterr().out
    assert "core: circle, diameter 2 mm, at (0 mm, 0 mm)" in out
    assert "shield 'screen', inside: circle, diameter 4 mm" in out
    assert "1 region," in out


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
def test_a_full_disk_behind_the_screen_does_not_stop_the_work(tmp_path: Path) -> None:
    wires = "{a: {shape: circle, radius: 1, at: [0, 0]}, b: {shape: circle, radius: 1, at: [3, 0]}}"
    (tmp_path / "pair.yaml").write_text(f"conductors: {wires}\nboundary: {{kind: open}}\n")
    command = [sys.executable, "-m", "nightcap", "run", str(tmp_path / "pair.yaml"), "--out", str(tmp_path / "out")]
    with Path("/dev/full").open("w") as full:
        done = subprocess.run(command, stdout=full, stderr=subprocess.PIPE, text=True, check=False, timeout=120)
    assert done.returncode == 0
    assert "no more lines here" in done.stderr
    assert (tmp_path / "out" / "pair" / "result.json").exists()
