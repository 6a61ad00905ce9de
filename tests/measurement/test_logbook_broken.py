"""Every broken log is refused with its reason, or read with the bad cell listed; nothing else happens."""

import numpy as np
import pytest

from engine.measurement.logbook import read_log
from engine.steam import InputError
from tests.measurement.broken_logs import REFUSED, REPORTED


@pytest.mark.parametrize("log", REFUSED, ids=lambda log: log.name)
def test_refused_with_its_reason(log):
    with pytest.raises(InputError) as error:
        read_log(log.data)
    for words in log.says:
        assert words in str(error.value)


@pytest.mark.parametrize("log", REPORTED, ids=lambda log: log.name)
def test_listed_by_row_column_content_and_reason(log):
    read = read_log(log.data)
    assert (log.row, log.column, log.content, log.reason) in read.rejected
    assert read.rejected_counts[log.reason] == 1
    good = read.rows != log.row
    assert good.sum() == (2 if log.name in ("cut in the last row", "bytes of another encoding") else 3)
    for values in read.channels.values():
        assert np.isfinite(values[good]).all()  # the rows around it are untouched


def test_there_are_enough_of_them():
    assert len(REFUSED) + len(REPORTED) >= 80
    assert len({log.name for log in REFUSED + REPORTED}) == len(REFUSED) + len(REPORTED)
