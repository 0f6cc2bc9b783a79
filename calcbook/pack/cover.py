"""What the cover of a calculation package says about the job."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from calcbook.errors import PackError


@dataclass(frozen=True)
class Cover:
    """The job data printed on the cover and on every page.

    Attributes
    ----------
    job, number, place
        Name of the job, its number, where it is built.
    revision, issue_date
        Revision mark and date of issue as YYYY-MM-DD; both may be empty, and the pages say so.
    prepared, checked
        Initials; ``checked`` is empty as long as nobody has checked.
    """

    job: str
    number: str
    place: str
    revision: str
    issue_date: str
    prepared: str
    checked: str

    def date(self) -> dt.date:
        """Return the date of issue; raises PackError when it is no date.

        A PDF/A file needs a date: without one it gets the first day files can be dated by.
        """
        if not self.issue_date:
            return dt.date(1970, 1, 1)
        try:
            return dt.date.fromisoformat(self.issue_date)
        except ValueError as error:
            raise PackError(
                "the issue date of the job cannot be read",
                hint="write it as year-month-day, for example 2026-11-20",
                text=self.issue_date,
            ) from error

    @property
    def issue(self) -> str:
        """Revision and date of issue, or in words that there is none."""
        revision = f"revision {self.revision}" if self.revision else "no revision"
        return f"{revision}, {self.issue_date or 'not dated'}"

    @property
    def same_person(self) -> bool:
        """Whether the one who prepared is also the one who checked."""
        prepared, checked = (" ".join(n.casefold().split()) for n in (self.prepared, self.checked))
        return bool(checked) and prepared == checked
