"""Every broken log is refused with its reason, or read with the bad cell listed; nothing else happens."""

import csv
import io

import numpy as np
import pytest

from engine.measurement.logbook import read_log
from engine.measurement.logbook.write import write_log
from engine.steam import InputError
from tests.measurement.broken_logs import HARMLESS, REFUSED, REPORTED


@pytest.mark.parametrize("log", REFUSED, ids=lambda log: log.name)
def test_refused_with_its_reason(log):
    with pytest.raises(InputError) as error:
        read_log(log.data)
    for words in log.says:
        assert words in str(error.value)
    for fault in error.value.faults:
        assert fault.quantity and fault.value != "" and fault.limit
        assert fault.hint or fault.why, f"no word of what to do: {fault}"


@pytest.mark.parametrize("log", REPORTED, ids=lambda log: log.name)
def test_listed_by_row_column_content_and_reason(log):
    read = read_log(log.data)
    assert (log.row, log.column, log.content, log.reason) in read.rejected
    assert read.rejected_counts[log.reason] == 1
    good = read.rows != log.row
    assert good.sum() == (2 if log.name in ("cut in the last row", "bytes of another encoding") else 3)
    for values in read.channels.values():
        assert np.isfinite(values[good]).all()  # the rows around it are untouched


@pytest.mark.parametrize("data", [data for _, data in HARMLESS], ids=[name for name, _ in HARMLESS])
def test_wicked_words_are_words(data, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    log = read_log(data)
    assert log.channels["p_line"].tolist() == [901e3, 902e3] and not log.rejected
    target = io.BytesIO()
    write_log(target, log)
    cells = [cell for row in csv.reader(io.StringIO(target.getvalue().decode("utf-8-sig"))) for cell in row]
    assert not any(cell.startswith(("=", "@", "+")) for cell in cells), "a spreadsheet program would compute it"
    assert list(tmp_path.iterdir()) == []


def test_a_path_is_no_name_of_a_log(tmp_path):
    file = io.BytesIO(HARMLESS[0][1])
    file.name = "../../../etc/passwd.csv"
    assert read_log(file).name == "passwd.csv"
    with pytest.raises(InputError, match="no such file"):
        read_log(tmp_path / ".." / "nowhere" / "passwd")


def test_there_are_enough_of_them():
    assert len(REFUSED) + len(REPORTED) >= 80
    assert len({log.name for log in REFUSED + REPORTED}) == len(REFUSED) + len(REPORTED)
