"""The command line: answers on one stream, reasons on the other, files written whole, a status for scripts."""

import csv
import io
import json
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from scenarios import FACTORY
from simulated import channels_of

from engine.job.case.casefile import to_json
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import NOT_STATED
from engine.job.case.rows import Entry
from engine.job.commands import COMMANDS, main
from engine.job.result import reduce
from engine.job.result.intake import read
from engine.job.result.runs import run_of_log
from engine.job.result.said import headline
from engine.measurement.logbook import read_log
from engine.measurement.logbook.write import write_log

ROOT = Path(__file__).parents[2]


def run(*arguments):
    """(exit status, what was said, what was warned)."""
    out, err = io.StringIO(), io.StringIO()
    status = main([str(a) for a in arguments], out, err)
    return status, out.getvalue(), err.getvalue()


@pytest.fixture
def case_file(tmp_path):
    def write(case=FACTORY):
        path = tmp_path / "case.json"
        path.write_text(to_json(case), encoding="utf-8")
        return path

    return write


@pytest.fixture
def logs(tmp_path):
    folder = tmp_path / "logs"
    folder.mkdir()
    for k in (1, 2):
        time, shown, basis = channels_of(FACTORY, 0.972, minutes=40.0, warm_up=20.0, noise_T=0.1, seed=k)
        write_log(folder / f"run{k}.csv", shown, time=time, basis=basis)
    (folder / "notes.md").write_text("not a log")
    return folder


def test_help_tells_every_command_and_the_exit_statuses(capsys):
    assert main(["--help"]) == 0
    text = capsys.readouterr().out
    assert all(command.name in text for command in COMMANDS)
    assert "exit status" in text and "never permission to open a valve" in text
    for command in COMMANDS:
        assert main([command.name, "--help"]) == 0
        assert command.help[1:20] in capsys.readouterr().out


def test_the_module_runs(case_file):
    done = subprocess.run([sys.executable, "-m", "engine", "quality", str(case_file())], cwd=ROOT, capture_output=True,
                          text=True, timeout=120)
    assert done.returncode == 0 and done.stdout.startswith("● Quality in the line 0.9720") and done.stderr == ""


def test_one_log_gives_the_words_of_the_screen(logs, case_file):
    status, out, err = run("reduce", logs / "run1.csv", "--case", case_file(), "--draws", 20_000)
    result = reduce(FACTORY, [run_of_log(read(FACTORY, logs / "run1.csv"))])
    assert status == 0 and out.splitlines()[0] == f"● {headline(result)} (result)"
    assert "With sampling ◇ undecided" in out and "By the instruments alone ✓ accept" in out
    assert "Monte Carlo: 20 000 draws" in out and "heat loss, on: enthalpy +1.98" in out
    assert "run1.csv: not recorded, taken from the case: barometer" in err


def test_a_folder_is_a_test_of_several_runs(logs, case_file, tmp_path):
    files = {name: tmp_path / f"{name}.out" for name in ("json", "csv", "rows")}
    status, out, _ = run("reduce", logs, "--case", case_file(), "--draws", 0, "--quiet",
                         *(part for name, path in files.items() for part in (f"--{name}", path)))
    assert status == 0 and out == ""
    data = json.loads(files["json"].read_text(encoding="utf-8"))
    assert data["x"] == pytest.approx(0.972, abs=2e-4) and data["final"] and data["repeatability"]["runs"] == 2
    assert [r["name"] for r in data["runs"]] == ["run1.csv", "run2.csv"] and "monte_carlo" not in data
    assert data["by_instruments"]["U"] < data["with_sampling"]["U"]
    assert sum(t["share"] for t in data["terms"]) == pytest.approx(1.0)
    table = list(csv.DictReader(io.StringIO(files["csv"].read_text(encoding="utf-8"))))
    assert [line["run"] for line in table] == ["run1.csv", "run2.csv", "all runs"]
    assert float(table[-1]["x"]) == data["x"] and float(table[-1]["U"]) == data["with_sampling"]["U"]
    rows = list(csv.DictReader(io.StringIO(files["rows"].read_text(encoding="utf-8-sig"))))
    assert len(rows) == 2 * 241 and {row["run"] for row in rows} == {"run1.csv", "run2.csv"}
    counting = [float(row["quality [1]"]) for row in rows if row["counts"] == "yes"]
    assert np.mean(counting) == pytest.approx(data["x"], abs=1e-4)
    assert sum(r["rows_used"] for r in data["runs"]) == len(counting)


def test_json_instead_of_the_text(logs, case_file):
    status, out, _ = run("reduce", logs / "run1.csv", "--case", case_file(), "--draws", 0, "--json", "-")
    assert status == 0 and json.loads(out)["kind"] == "result"
    status, out, _ = run("quality", case_file(), "--json", "-")
    assert status == 0 and json.loads(out)["x"] == pytest.approx(0.97202, abs=1e-5)


def test_monte_carlo_stands_in_the_json(logs, case_file):
    _, out, _ = run("reduce", logs / "run1.csv", "--case", case_file(), "--draws", 20_000, "--json", "-")
    drawn = json.loads(out)["monte_carlo"]
    assert drawn["draws"] == 20_000 and drawn["unreadable"] == 0 and drawn["interval"][0] < drawn["mean"]


def test_typed_readings_need_no_log(case_file):
    row = FIELDS["readings"].row
    case = FACTORY.with_(readings=tuple(row(T_exhaust=Entry(T, "°C")) for T in (121.0, 121.1, 121.2, 121.1)))
    status, out, _ = run("reduce", "--case", case_file(case), "--draws", 0)
    assert status == 0 and out.startswith("● Quality 0.9720 ± 0.0058")


def test_a_window_by_hand_and_its_reason(logs, case_file):
    words = ("reduce", logs / "run1.csv", "--case", case_file(), "--draws", 0, "--window", 25, 35)
    status, out, err = run(*words)
    assert status == 1 and out.startswith("◐") and "the reason for the window chosen by hand" in err
    status, out, _ = run(*words, "--reason", "load steady")
    assert status == 0 and "the window chosen by hand, 25.0 to 35.0 min" in out


def test_an_open_question_is_answered_on_the_command_line(tmp_path, case_file):
    time, shown, _ = channels_of(FACTORY, 0.972, minutes=20.0)
    lines = ["t [s],line pressure,Temp 3"]
    lines += [f"{t},{p / 1e5},{T - 273.15}" for t, p, T in zip(time, shown["p_line"], shown["T_exhaust"], strict=True)]
    log = tmp_path / "mute.csv"
    log.write_text("\n".join(lines))
    words = ("reduce", log, "--case", case_file(), "--draws", 0)
    status, _, err = run(*words)
    assert status == 2 and "In which unit is the line pressure" in err and "gauge or absolute?" in err
    status, out, _ = run(*words, "--unit", "p_line=bar", "--basis", "gauge", "--column", "T_exhaust=Temp 3",
                         "--unit", "T_exhaust=°C")
    assert status == 0 and out.startswith("● Quality 0.9720")
    status, out, _ = run(*words, "--unit", "p_line=bar", "--basis", "p_line=gauge", "--column", "T_exhaust=Temp 3",
                         "--unit", "T_exhaust=°C")
    assert status == 0


def test_figures_without_a_result_have_a_status_of_their_own(logs, case_file):
    status, out, err = run("reduce", logs / "run1.csv", "--draws", 0, "--case",
                           case_file(FACTORY.with_(sampling_kind=NOT_STATED)))
    assert status == 1 and out.startswith("◐ Quality 0.97") and "sampling representativeness" in err
    status, out, err = run("reduce", logs / "run1.csv", "--case",
                           case_file(FACTORY.with_(heat_loss_method="not decided")))
    assert status == 1 and out.startswith("○ No quality") and "heat loss has not been decided" in err


def test_a_log_that_never_settles_says_why(tmp_path, case_file):
    time, shown, basis = channels_of(FACTORY, 0.972, swing=5e4)
    write_log(tmp_path / "wild.csv", shown, time=time, basis=basis)
    status, _, err = run("reduce", tmp_path / "wild.csv", "--case", case_file())
    assert status == 1 and "No stretch of this run is settled" in err
    assert "0.0 to 60.0 min: the line pressure" in err


def test_rejected_cells_and_suspicions_are_told(tmp_path, case_file):
    rows = [f"{t},9.0,{'n/a' if t == 50 else 121.1}" for t in range(0, 1300, 10)]
    (tmp_path / "gap.csv").write_text("t [s],p1 [bar g],T2 [°C]\n" + "\n".join(rows), encoding="utf-8")
    status, _, err = run("reduce", tmp_path / "gap.csv", "--case", case_file(), "--draws", 0)
    assert status == 0 and "1 refused: the instrument says that it has no value" in err
    assert "the line pressure is the same in all" in err


@pytest.mark.parametrize(("words", "message"), [
    (("quality", "nowhere.json"), "case file: got nowhere.json, needs a file that can be read"),
    (("reduce", "nowhere.csv"), "no such file"),
    (("reduce", "."), "folder of logs: got ., needs a folder with logs in it"),
    (("reduce", "--window", "30", "20"), "--window: got 30 20 min, needs a beginning before the end"),
    (("reduce", "--draws", "-5"), "--draws: got -5, needs 0 to 20000000"),
    (("reduce", "LOG", "--unit", "bar"), "--unit: got bar, needs --unit CHANNEL=..."),
    (("reduce", "LOG", "--unit", "p_line=furlong"), "furlong"),
    (("reduce", "LOG", "--column", "T_exhaust=Nowhere"), "column: got Nowhere, needs one of"),
    (("reduce", "LOG", "--json", "no/such/place.json"), "output file: got"),
])
def test_what_cannot_be_used_is_refused_in_words(words, message, logs, case_file, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    words = [logs / "run1.csv" if word == "LOG" else word for word in words]
    case = [] if words[0] == "quality" else ["--case", case_file()]
    status, _, err = run(*words, *case)
    assert status == 2 and message in err
    assert not list(tmp_path.glob("**/*.part"))


def test_a_broken_case_and_a_wrong_command(tmp_path, capsys):
    (tmp_path / "case.json").write_text("{}")
    status, _, err = run("quality", tmp_path / "case.json")
    assert status == 2 and "a document with" in err
    assert main(["fly"]) == 2 and main(["reduce"]) == 2 and main([]) == 2
    assert "the following arguments are required: --case" in capsys.readouterr().err


def test_readings_that_cannot_be_read_have_no_answer(case_file):
    status, out, _ = run("quality", case_file(FACTORY.with_(T_exhaust=Entry(100.0, "°C"))))
    assert status == 1 and out.startswith("○ No quality can be given: it is below")
    status, out, _ = run("assess", case_file(FACTORY), "--units", "US")
    assert status == 0 and "°F" in out


def test_reduced_rows_can_be_read_back_as_a_log(logs, case_file, tmp_path):
    run("reduce", logs / "run1.csv", "--case", case_file(), "--draws", 0, "--quiet", "--rows", tmp_path / "rows.csv")
    log = read_log(tmp_path / "rows.csv")
    assert log.basis == {"p_line": "absolute", "p_exhaust": "absolute"} and len(log) == 241
