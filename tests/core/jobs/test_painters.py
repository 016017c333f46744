"""Figures drawn by another process are those drawn here, whatever happens to the process."""

import pytest

from made_up import made_up_session
from shadowscale.jobs.painters import painters
from shadowscale.sheet.figures import all_figures
from shadowscale.sheet.showing import shown_of


@pytest.fixture(scope="module")
def shown():
    session = made_up_session()
    return shown_of(session.solution, session.photometry, session.velocities)


@pytest.fixture(scope="module")
def drawn_here(shown):
    return all_figures(shown)


@pytest.fixture(autouse=True)
def two_processors(monkeypatch):
    monkeypatch.setattr("shadowscale.jobs.painters.os.cpu_count", lambda: 2)


def test_another_process_draws_the_same_bytes(shown, drawn_here):
    with painters() as found:
        assert found.figures(shown) == drawn_here


def test_a_process_that_dies_is_replaced_by_drawing_here(shown, drawn_here):
    with painters() as found:
        found._process.kill()
        assert found.figures(shown) == drawn_here


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
