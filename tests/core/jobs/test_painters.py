"""A report made by another process is that made here, whatever happens to the process."""

import pytest

from made_up import made_up_session
from shadowscale.jobs.painters import painters
from shadowscale.jobs.reporting import made_here, report_of
from shadowscale.jobs.results import sheet_of
from shadowscale.sheet.report import make_document


@pytest.fixture(scope="module")
def asked():
    session = made_up_session()
    report = report_of(session, sheet_of(session))
    return report.shown, make_document(report)


@pytest.fixture(scope="module")
def here(asked):
    return made_here(*asked)


@pytest.fixture(autouse=True)
def two_processors(monkeypatch):
    monkeypatch.setattr("shadowscale.jobs.painters.os.cpu_count", lambda: 2)


def test_another_process_makes_the_same_bytes(asked, here):
    with painters() as found:
        found.begin(*asked)
        assert found.finish() == here


def test_a_process_that_dies_is_replaced_by_making_it_here(asked, here):
    with painters() as found:
        found._process.kill()
        found.begin(*asked)
        assert found.finish() == here


def test_no_process_stays_behind():
    with painters() as found:
        process = found._process
        assert process.poll() is None
    assert process.poll() is not None


def test_none_are_started_in_vain(monkeypatch):
    with painters(wanted=False) as found:
        assert found is None
    monkeypatch.setattr("shadowscale.jobs.painters.os.cpu_count", lambda: 1)
    with painters() as found:
        assert found is None
