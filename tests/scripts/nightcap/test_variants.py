"""Cases with variants, from the command line to the table."""

import csv
import json
import math
from dataclasses import replace
from pathlib import Path

import pytest
from numpy.testing import assert_allclose
from stand_ins import Moody, met

import nightcap.run
import nightcap.summaries
from nightcap.command import main
from nightcap.geometry.errors import Problem, UsageError
from nightcap.jobs import Job, find_jobs, with_variants
from nightcap.outputs.summary_csv import rows, write_summary
from nightcap.result import Result, failed_result
from nightcap.screen import summary_lines, variant_counts, variant_lines
from nightcap.summaries import Summaries
from nightcap.work import Work

EPS0 = 8.8541878188e-12
"""F/m. Source: CODATA 2022."""
COAX = """\
title: Round core in a round screen
parameters: {{ratio: 2, thick: 2*ratio}}
conductors:
  core: {{shape: circle, radius: inner}}
boundary: {{kind: shield, name: screen, shape: circle, radius: inner*ratio + shift}}
background: {{permittivity: eps}}
accuracy: 1e-6
vary:
{vary}
"""
CLOSED = "  inner: [1, 0.05 in]\n  shift: [0]\n  eps: [1, 2.5]"


@pytest.fixture
def coax(tmp_path: Path) -> Path:
    path = tmp_path / "coax.yaml"
    path.write_text(COAX.format(vary=CLOSED))
    return path


def table(path: Path) -> list[dict[str, str]]:
    return list(csv.DictReader(path.read_text().splitlines()))


def jobs_of(*paths: Path) -> tuple[Job, ...]:
    return with_variants(find_jobs([str(path) for path in paths]))


def test_each_variant_is_a_job_with_its_values_and_folder(coax: Path) -> None:
    jobs = jobs_of(coax)
    assert [job.folder for job in jobs] == [
        "coax/inner=1,shift=0,eps=1", "coax/inner=1,shift=0,eps=2.5",
        "coax/inner=0.05in,shift=0,eps=1", "coax/inner=0.05in,shift=0,eps=2.5",
    ]  # fmt: skip
    assert {job.name for job in jobs} == {"coax"}
    assert_allclose([job.values[0][1] for job in jobs], [1e-3, 1e-3, 1.27e-3, 1.27e-3], rtol=1e-15)
    assert jobs[3].values[2] == ("eps", 2.5)


@pytest.mark.usefixtures("coax")
def test_a_file_that_cannot_be_used_or_varies_nothing_stays_one_job(tmp_path: Path) -> None:
    for name, text in (
        ("broken", COAX.format(vary="  inner: [a, 2]")),
        ("bad", COAX.format(vary=CLOSED).replace("[1, 0.05 in]", "[-1, -2]")),
        ("plain", "conductors: {a: {shape: circle, radius: 1}}\nboundary: {kind: ground_plane, at: -3}"),
        ("garbage", "vary: ["),
    ):
        (tmp_path / f"{name}.yaml").write_text(text)
        (job,) = jobs_of(tmp_path / f"{name}.yaml")
        assert (job.folder, job.variant) == (name, "")
    assert len(jobs_of(tmp_path)) == 8


@pytest.mark.usefixtures("coax")
def test_a_case_in_the_place_of_a_variant_is_refused(tmp_path: Path) -> None:
    (tmp_path / "coax").mkdir()
    (tmp_path / "coax/inner=1,shift=0,eps=1.yaml").write_text("conductors: {}")
    with pytest.raises(UsageError, match="share the result folder coax/inner=1,shift=0,eps=1"):
        jobs_of(tmp_path)


def test_run_writes_a_folder_for_each_variant_and_a_table(
    coax: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """2 pi eps0 eps / ln(b/a); source: Maxwell, Treatise."""
    out = tmp_path / "out"
    assert main(["run", str(coax), "--out", str(out), "--no-pictures"]) == 0
    shown = capsys.readouterr()
    assert shown.out.splitlines()[0] == "coax: 4 variants"
    assert shown.out.count("pF/m") == 0
    assert shown.out.count(": met; ") == 4
    assert "4 of 4 met" in shown.out
    assert "1 case, 4 variants in all: 4 met" in shown.out
    assert max(len(line) for line in shown.out.splitlines() if str(out) not in line) <= 80
    lines = table(out / "coax/summary.csv")
    assert [line["variant"] for line in lines] == [job.variant for job in jobs_of(coax)]
    for line in lines:
        eps = float(line["eps"])
        exact = 2 * math.pi * EPS0 * eps / math.log(2)
        value, half_width = float(line["C core core"]), float(line["half_width core core"])
        assert_allclose(value, exact, rtol=1e-6)
        assert abs(value - exact) <= half_width
        assert float(line["reached"]) <= float(line["requested"]) == 1e-6
        document = json.loads((out / "coax" / line["variant"] / "result.json").read_text())
        assert (document["case"], document["status"]) == ("coax", line["status"]) == ("coax", "met")
        assert document["variant"] == {"inner": float(line["inner"]), "shift": 0.0, "eps": eps}
        assert document["capacitance"]["value"] == [[value]]
        assert document["capacitance"]["half_width"] == [[half_width]]
    assert not (out / "coax/result.json").exists()


def test_variants_that_cannot_be_solved_leave_the_others_alone(
    coax: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    coax.write_text(COAX.format(vary="  shift: [0, -1.5]\n  inner: [1, -1]\n  eps: [2]"))
    assert main(["run", str(coax), "--out", str(tmp_path / "out"), "--no-pictures", "--jobs", "1"]) == 1
    shown = capsys.readouterr()
    assert "1 of 4 met" in shown.out
    lines = table(tmp_path / "out/coax/summary.csv")
    assert [line["status"] for line in lines] == ["met", "failed", "failed", "failed"]
    assert [float(line["inner"]) for line in lines] == [1e-3, -1e-3, 1e-3, -1e-3]
    assert "greater than 0" in lines[1]["message"]
    assert lines[1]["C core core"] == ""
    assert lines[0]["C core core"] != ""
    document = json.loads((tmp_path / "out/coax/shift=-1.5,inner=1,eps=2/result.json").read_text())
    assert document["status"] == "failed"
    assert document["variant"] == {"shift": -1.5e-3, "inner": 1e-3, "eps": 2.0}


def test_check_shows_parameters_and_variants(coax: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(coax)]) == 0
    out = capsys.readouterr().out
    assert "parameters, in variant inner=1,shift=0,eps=1\n" in out
    assert "    inner = 1 mm\n" in out
    assert "    thick = 2*ratio = 4; used nowhere\n" in out
    assert "  4 variants, the first of which is described above\n    inner=1,shift=0,eps=1\n" in out


def test_check_finds_the_variants_whose_layout_is_wrong(coax: Path, capsys: pytest.CaptureFixture[str]) -> None:
    coax.write_text(COAX.format(vary="  shift: [0, -1.5, -1.6]\n  inner: [1]\n  eps: [1]"))
    assert main(["check", str(coax)]) == 1
    err = capsys.readouterr().err
    assert "in variant shift=-1.5,inner=1,eps=1 and 1 other: " in err
    assert len(err.splitlines()) == 1


def test_check_of_many_variants_says_how_many_layouts_it_resolved(
    coax: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    coax.write_text(COAX.format(vary="  inner: {from: 1, to: 2, steps: 120}\n  shift: [0]\n  eps: [1]"))
    assert main(["check", str(coax)]) == 0
    out = capsys.readouterr().out
    assert "  120 variants, " in out
    assert "    and 116 more, the last inner=2,shift=0,eps=1\n    layouts of 50 of them resolved" in out


def variant_jobs(*names: str) -> list[Job]:
    return [Job("case.yaml", "case", name, (("x", 1e-3 * k), ("y", 2.0))) for k, name in enumerate(names)]


def test_table_has_a_row_for_every_variant_whatever_became_of_it() -> None:
    jobs = variant_jobs("a", "b", "c", "d")
    bad = failed_result("case", (Problem("case.yaml", 3, "x", 'no "x"'), Problem("case.yaml", 4, "y", "no y")))
    results: dict[Job, Result] = {
        jobs[1]: met(size=2),
        jobs[2]: bad,
        jobs[3]: replace(met(size=1), reason="time is up"),
    }
    header, *lines = rows(jobs, results)
    assert header == [
        "variant", "status", "message", "requested", "reached", "x", "y", "C w1 w1", "half_width w1 w1",
        "C w1 w2", "half_width w1 w2", "C w2 w2", "half_width w2 w2",
    ]  # fmt: skip
    assert [line[:4] for line in lines] == [
        ["a", "not_run", "", ""], ["b", "met", "", 1e-4], ["c", "failed", 'no "x"; no y', ""],
        ["d", "met", "time is up", 1e-4],
    ]  # fmt: skip
    assert {len(line) for line in lines} == {13}
    assert [line[7] == "" for line in lines] == [True, False, True, False]
    assert lines[3][9:] == [""] * 4
    C = met(size=2).capacitance
    assert C is not None
    assert_allclose([lines[1][9], lines[1][10]], [C.value[0, 1], C.half_width[0, 1]], rtol=1e-15)


def test_table_is_written_whole_or_not_at_all(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    jobs = variant_jobs("a", "b")
    write_summary(tmp_path, jobs, {})
    before = (tmp_path / "summary.csv").read_bytes()

    def full(*_: object) -> None:
        raise OSError("disk full")

    monkeypatch.setattr("os.fsync", full)
    with pytest.raises(OSError, match="disk full"):
        write_summary(tmp_path, jobs, {jobs[0]: met()})
    assert (tmp_path / "summary.csv").read_bytes() == before
    assert [path.name for path in tmp_path.iterdir()] == ["summary.csv"]


def statuses(path: Path) -> list[str]:
    return [line["status"] for line in table(path)]


def test_table_grows_while_the_batch_runs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    jobs = variant_jobs("a", "b", "c")
    (tmp_path / "case").mkdir()
    (tmp_path / "case/result.json").touch()
    summaries = Summaries(tmp_path, jobs)
    summaries.begin(jobs)
    path = tmp_path / "case/summary.csv"
    assert statuses(path) == ["not_run"] * 3
    assert not (tmp_path / "case/result.json").exists()
    summaries.finished(jobs[1], met())
    assert statuses(path) == ["not_run"] * 3  # written a moment ago
    monkeypatch.setattr(nightcap.summaries, "INTERVAL", 0.0)
    summaries.finished(jobs[0], met())
    assert statuses(path) == ["met", "met", "not_run"]
    monkeypatch.undo()
    summaries.finished(jobs[2], failed_result("case", ()))
    assert statuses(path) == ["met", "met", "failed"]


def test_table_of_a_run_that_was_cut_short_holds_what_is_finished(tmp_path: Path) -> None:
    jobs = variant_jobs("a", "b")
    summaries = Summaries(tmp_path, jobs)
    summaries.begin(jobs)
    summaries.finished(jobs[0], met())
    summaries.end()
    assert statuses(tmp_path / "case/summary.csv") == ["met", "not_run"]


def test_table_of_an_earlier_run_goes_when_nothing_is_varied_any_more(tmp_path: Path) -> None:
    write_summary(tmp_path / "case", variant_jobs("a"), {})
    job = Job("case.yaml", "case")
    Summaries(tmp_path, [job]).begin([job])
    assert not (tmp_path / "case/summary.csv").exists()


def test_table_that_cannot_be_written_is_said_and_leaves_with_1(
    coax: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "out/coax/summary.csv").mkdir(parents=True)
    monkeypatch.setattr(nightcap.run, "Work", Moody)
    assert main(["run", str(coax), "--out", str(tmp_path / "out"), "--jobs", "1"]) == 1
    captured = capsys.readouterr()
    assert "summary.csv: could not be written" in captured.err
    assert "4 met, 0 not met, 0 failed" in captured.out


def test_worker_that_dies_fails_its_variant_with_its_values(tmp_path: Path) -> None:
    (job,) = variant_jobs("a")
    result = Work(tmp_path).failed(job, "the worker process died")
    assert (result.folder, dict(result.variant)) == ("case/a", {"x": 0.0, "y": 2.0})
    document = json.loads((tmp_path / "case/a/result.json").read_text())
    assert (document["status"], document["variant"]) == ("failed", {"x": 0.0, "y": 2.0})


def test_a_variant_that_is_gone_when_its_turn_comes_fails(coax: Path, tmp_path: Path) -> None:
    job = jobs_of(coax)[0]
    coax.write_text(COAX.format(vary=CLOSED.replace("[1, ", "[3, ")))
    result = Work(tmp_path, pictures=False)(job, lambda _: None)
    assert result.status == "failed"
    assert "no variant inner=1,shift=0,eps=1 any more" in result.problems[0].text
    single = replace(job, variant="", values=())
    assert "start it again" in Work(tmp_path, pictures=False)(single, lambda _: None).problems[0].text


def test_screen_tells_variants_in_a_line_each_and_cases_in_sum() -> None:
    results = [replace(met("long/" * 20 + "pair"), variant_name=f"x={k}", reached=k * 1e-6) for k in range(1, 13)]
    results[3] = replace(results[3], status="not_met", reason="time is up")
    results.append(met("single"))
    jobs = [Job("", r.case, r.variant_name) for r in results]
    lines = [*variant_counts(jobs), *(line for r in results for line in variant_lines(r)), *summary_lines(results)]
    assert max(map(len, lines)) <= 80
    text = "\n".join(lines)
    assert "pair: 12 variants" in text
    assert "pair/x=4: not met (time is up); 4.0e-06 reached, 0.40 s" in text
    assert "  1.2e-05    4.80  11 of 12 met" in text
    assert lines[-1] == "2 cases, 13 variants in all: 12 met, 1 not met, 0 failed"
