"""Run sheet and record from the command line: files written whole, statuses and reasons for scripts."""

import io
import json
import zipfile

import pytest

from engine.job.case.casefile import from_record, to_json
from engine.job.case.demo import DEMO
from engine.job.case.examples import HEATING_STEAM
from engine.job.case.fields_path import UNDECIDED
from engine.job.case.rows import Entry
from engine.job.commands import main
from engine.job.record import record_html
from engine.job.record.data import reopened
from engine.job.rehearsal.demo_log import demo_log
from engine.job.result import reduce
from engine.job.result.runs import run_of_log
from engine.job.runsheet.print import runsheet_html
from engine.job.runsheet.readings import with_reading
from engine.steam.units import SI, US


@pytest.fixture
def run(tmp_path):
    """Run a command on a case kept in a file; gives (status, out, err)."""
    def ran(command, case, *arguments):
        (tmp_path / "case.json").write_text(to_json(case), encoding="utf-8")
        out, err = io.StringIO(), io.StringIO()
        status = main([command, str(tmp_path / "case.json"), *map(str, arguments)], out, err)
        return status, out.getvalue(), err.getvalue()
    return ran


def test_the_run_sheet_is_that_of_the_page(run, tmp_path):
    file = tmp_path / "sheet.html"
    status, out, err = run("runsheet", DEMO, "--out", file)
    assert (status, err) == (0, "")
    assert file.read_text(encoding="utf-8") == runsheet_html(DEMO, SI, "A4")
    assert "can be read on this line" in out


def test_the_paper_follows_the_units_unless_told(run, tmp_path):
    file = tmp_path / "sheet.html"
    run("runsheet", DEMO, "--out", file, "--units", "US")
    assert file.read_text(encoding="utf-8") == runsheet_html(DEMO, US, "Letter")
    run("runsheet", DEMO, "--out", file, "--units", "US", "--paper", "A4")
    assert file.read_text(encoding="utf-8") == runsheet_html(DEMO, US, "A4")


def test_a_sheet_that_leads_to_no_number_says_so_by_its_status(run, tmp_path):
    status, out, _ = run("runsheet", HEATING_STEAM, "--out", tmp_path / "sheet.html")
    assert status == 1 and "cannot be read" in out


def test_a_page_can_go_to_the_standard_output(run):
    assert run("runsheet", DEMO, "--out", "-")[1] == runsheet_html(DEMO, SI, "A4")
    assert run("record", DEMO, "--out", "-", "--made", "today")[1] == record_html(DEMO, None, SI, "A4", made="today")


def test_the_record_of_a_single_reading(run, tmp_path):
    file = tmp_path / "record.html"
    assert run("record", DEMO, "--out", file, "--made", "2025-03-04 14:20") == (0, "", "")
    assert from_record(file.read_bytes()) == DEMO
    run("record", DEMO, "--out", file)
    assert "Made 20" in file.read_text(encoding="utf-8")  # now


def test_the_record_of_typed_readings(run, tmp_path):
    case = DEMO
    for T in (121.0, 121.2, 121.1):
        case = with_reading(case, run="1", T_exhaust=Entry(T, "°C"))
    file = tmp_path / "record.html"
    assert run("record", case, "--out", file)[0] == 0
    assert "3 of 3 sets count." in file.read_text(encoding="utf-8")


def test_the_record_of_a_log_with_its_data(run, tmp_path):
    log, file = tmp_path / "run1.csv", tmp_path / "record.zip"
    demo_log(log, DEMO, seed=4, x=0.972, duration=4200.0, every=30.0)
    assert run("record", DEMO, log, "--out", file)[0] == 0
    archive = zipfile.ZipFile(file)
    assert archive.namelist() == ["record.html", "case.json", "readings.csv"]
    assert reopened(archive.read("record.html")).logs[0].name == "run1.csv"


@pytest.mark.parametrize("order", ["LOG --out FILE --made today", "--out FILE LOG --made today",
                                   "--out FILE --made today LOG"])
def test_logs_may_stand_before_between_and_after_the_options(run, tmp_path, order):
    log, file = tmp_path / "run1.csv", tmp_path / "record.html"
    demo_log(log, DEMO, seed=4, x=0.972, duration=4200.0, every=30.0)
    named = {"LOG": log, "FILE": file}
    assert run("record", DEMO, *(named.get(word, word) for word in order.split())) == (0, "", "")
    assert [log.name for log in reopened(file.read_bytes()).logs] == ["run1.csv"]


@pytest.mark.parametrize(("command", "more"), [("record", ["run1.csv", "--no-such"]), ("runsheet", ["run1.csv"])])
def test_what_no_command_knows_is_still_refused(run, tmp_path, capsys, command, more):
    assert run(command, DEMO, "--out", tmp_path / "x.html", *more)[0] == 2
    assert f"unrecognized arguments: {more[-1]}" in capsys.readouterr().err


def test_a_record_is_retraced_from_itself_alone(run, tmp_path):
    log, file, again = tmp_path / "run1.csv", tmp_path / "record.html", tmp_path / "again.html"
    demo_log(log, DEMO, seed=4, x=0.972, duration=4200.0, every=30.0)
    run("record", DEMO, log, "--out", file, "--made", "2025-03-04 14:20")
    log.unlink()
    said = []
    for arguments in (["record", file, "--out", again, "--made", "2025-03-04 14:20"],
                      ["reduce", "--case", file, "--json", "-", "--draws", "0"], ["quality", file]):
        out, err = io.StringIO(), io.StringIO()
        assert main([*map(str, arguments)], out, err) == 0, err.getvalue()
        said.append(out.getvalue())
    assert again.read_bytes() == file.read_bytes()
    result = reduce(DEMO, tuple(map(run_of_log, reopened(file.read_bytes()).logs)))
    assert json.loads(said[1])["x"] == result.x


def test_what_is_undecided_is_named_and_nothing_is_written(run, tmp_path):
    file = tmp_path / "record.html"
    status, out, err = run("record", DEMO.with_(heat_loss_method=UNDECIDED, sampling=None), "--out", file)
    assert (status, out) == (1, "") and not file.exists()
    assert "heat loss: got not decided" in err and "sampling representativeness: got not stated" in err


@pytest.mark.parametrize("command", ["runsheet", "record"])
def test_what_cannot_be_used_is_refused(run, tmp_path, command):
    status, _, err = run(command, DEMO.with_(p_exhaust=Entry(12.0, "bar", "absolute")), "--out", tmp_path / "x.html")
    assert status == 2 and "Exhaust pressure: got 12" in err
    status, _, err = run(command, DEMO, "--out", tmp_path / "no such folder" / "x.html")
    assert status == 2 and "output file" in err
    assert main([command, str(tmp_path / "none.json"), "--out", "-"], io.StringIO(), err := io.StringIO()) == 2
    assert "a file that can be read" in err.getvalue()
    assert list(tmp_path.iterdir()) == [tmp_path / "case.json"]
