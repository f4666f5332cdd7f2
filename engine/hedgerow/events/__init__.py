"""The event log: what happened, in order; its words, its file and its sentences."""

from hedgerow.events.log import EventLog, LegName, LogMeta
from hedgerow.events.narrate import sentence, story
from hedgerow.events.store import read_log, read_logs, write_logs

__all__ = ["EventLog", "LegName", "LogMeta", "read_log", "read_logs", "sentence", "story", "write_logs"]
