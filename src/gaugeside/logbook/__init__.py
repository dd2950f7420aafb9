"""What was calculated, kept on disk."""

from gaugeside.logbook.entry import Entry
from gaugeside.logbook.store import Kept, Logbook
from gaugeside.logbook.trouble import LogbookTrouble, NoSuchEntry

__all__ = ["Entry", "Kept", "Logbook", "LogbookTrouble", "NoSuchEntry"]
