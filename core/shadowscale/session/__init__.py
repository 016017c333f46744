"""The state of a piece of work: what was loaded, wished, solved; undo; files."""

from shadowscale.session.history import History
from shadowscale.session.session import Exclusion, Kept, Markers, Session, Source
from shadowscale.session.store import open_session, save_session
from shadowscale.session.tables import with_exclusions, with_tables

__all__ = [
    "Exclusion",
    "History",
    "Kept",
    "Markers",
    "Session",
    "Source",
    "open_session",
    "save_session",
    "with_exclusions",
    "with_tables",
]
