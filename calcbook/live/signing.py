"""Who confirms by typing."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from calcbook.errors import InputError
from calcbook.record import Confirmation

UNSIGNED = "type the job number and 'prepared by' in the design basis"
PREPARED_BY = "prepared_by"


@dataclass(frozen=True)
class Signer:
    """Who confirms by typing: the job's number and the initials of the design basis."""

    job: str
    by: str

    def confirm(self, value: str) -> Confirmation | None:
        """Return a confirmation of today, or None where number or initials are missing."""
        if not (self.job and self.by):
            return None
        today = dt.datetime.now().astimezone().date()
        return Confirmation(value, self.job, self.by, today.isoformat())

    def sign(self, value: str) -> Confirmation:
        """Return a confirmation of today; InputError where number or initials are missing."""
        found = self.confirm(value)
        if found is None:
            raise InputError("who confirms is not known yet", hint=UNSIGNED)
        return found

    def missing(self) -> str:
        """Return that typing confirms nothing yet, and why, or ''."""
        words = [w for w, value in (("job number", self.job), ("initials", self.by)) if not value]
        if not words:
            return ""
        lacks = " and no ".join(words)
        return f"Nothing is confirmed by typing yet: the design basis has no {lacks}."
