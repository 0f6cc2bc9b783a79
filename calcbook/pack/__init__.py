"""The calculation package of a job: one PDF, made from statements alone."""

from __future__ import annotations

from calcbook.pack.compile import make_pack
from calcbook.pack.cover import Cover

__all__ = ["Cover", "make_pack"]
