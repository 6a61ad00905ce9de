"""The command ``rehearse``: the same figures as the engine, exit statuses, a log, a link."""

import io
import json

import pytest

from engine.job.case.casefile import to_json
from engine.job.case.demo import DEMO
from engine.job.case.examples import WET_LINE_READ
from engine.job.commands import main
from engine.job.commands.rehearse import by_the_book
from engine.job.rehearsal.cost import cost_of
from engine.job.rehearsal.link import from_link
from engine.job.rehearsal.readings import Way, reckoned
from engine.job.rehearsal.scenario import HiddenFault, Scenario, surprise
from engine.measurement.logbook import read_log


@pytest.fixture
def case_file(tmp_path):
    path = tmp_path / "case.json"
    path.write_text(to_json(DEMO), encoding="utf-8")
    return path


def run(*arguments):
    out, err = io.StringIO(), io.StringIO()
    status = main(["rehearse", *map(str, arguments)], out, err)
    return status, out.getvalue(), err.getvalue()


def test_truth_result_and_cost_are_the_engine_s(case_file):
    status, out, err = run(case_file, "--fault", "wet lagging", "--seed", 7, "--json", "-")
    said, scenario = json.loads(out), Scenario(DEMO, frozenset({"wet lagging"}), 7)
    r = by_the_book(scenario)
    assert (status, err) == (0, "")
    assert said["x_true"] == r.rig.x and said["x"] == reckoned(r, Way()).x
    assert said["costs"] == {"wet lagging": cost_of(scenario, HiddenFault.WET_LAGGING).size}


def test_the_text_says_what_was_hidden_and_what_it_cost(case_file):
    status, out, _ = run(case_file, "--fault", "Thermometer-offset", "--seed", 2, "--units", "US", "--quality", 0.98)
    assert status == 0
    assert "Hidden: thermometer offset; seed 2." in out and "The quality of the line was 0.9800" in out
    assert "°F of superheat" in out and "Thermometer offset, unnoticed: " in out


def test_wet_steam_gives_the_status_of_a_question_without_an_answer(case_file):
    status, out, err = run(case_file, "--fault", "wet exhaust")
    assert status == 1
    assert "there is no quality" in out and "not superheated enough" in err


def test_the_log_is_that_of_the_scenario(case_file, tmp_path):
    target = tmp_path / "out.csv"
    assert run(case_file, "--seed", 5, "--log", target, "--every", 20)[0] == 0
    log = read_log(io.BytesIO(target.read_bytes()))
    assert log.time[-1] > 5000 and {"p_line", "p_exhaust", "T_exhaust"} <= set(log.channels)


def test_a_link_opens_the_scenario_and_says_nothing_of_it(case_file):
    status, out, _ = run(case_file, "--surprise", "--seed", 11, "--link")
    assert status == 0 and out.startswith("?rehearsal=") and len(out.splitlines()) == 1
    assert from_link(out.strip().removeprefix("?rehearsal=")).scenario == surprise(DEMO, 11)


@pytest.mark.parametrize(("arguments", "why"), [
    (("--fault", "gremlins"), "hidden fault: got gremlins, needs one of: wet exhaust"),
    (("--fault", "gremlins", "--fault", "imps"), "got imps"),
    (("--quality", "1.3"), "quality of the line: got 1.3"),
    (("--seed", "-4"), "seed: got -4"),
    (("--sets", "0"), "--sets: got 0"),
    (("--surprise", "--fault", "wet lagging"), "--surprise: got --fault as well"),
    (("--log", "x.csv", "--every", "0"), "rows of the log"),
])
def test_what_cannot_be_played_is_refused_in_words(case_file, arguments, why, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    status, _, err = run(case_file, *arguments)
    assert status == 2 and why in err
    assert list(tmp_path.iterdir()) == [case_file]  # nothing half-written


def test_a_rig_that_is_not_simulated_is_refused(tmp_path):
    path = tmp_path / "case.json"
    path.write_text(to_json(WET_LINE_READ), encoding="utf-8")
    status, _, err = run(path)
    assert status == 2 and "needs throttling alone for a rehearsal" in err
