"""What was calculated, kept on disk."""

from gaugeside.logbook.entry import Entry
from gaugeside.logbook.store import SAME_WITHIN, Kept, Logbook
from gaugeside.logbook.trouble import LogbookTrouble, NoSuchEntry

__all__ = ["SAME_WITHIN", "Entry", "Kept", "Logbook", "LogbookTrouble", "NoSuchEntry"]
