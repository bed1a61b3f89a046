"""Drafts that outlive a refresh, a dropped connection and a restart: one SQLite file, one row a draft.

A draft is found by its token alone, which stands in the address of the user's browser. The file holds a hash of it, so
that whoever reads the file cannot open a draft by its address, and there is no way to list drafts.
"""

from __future__ import annotations

import hashlib
import os
import re
import secrets
import sqlite3
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

DAYS_KEPT = 30
LARGEST = 4 << 20
_TOKEN = re.compile(r"[A-Za-z0-9_-]{32,64}")


def new_token() -> str:
    return secrets.token_urlsafe(24)


def folder() -> Path:
    """Where drafts are kept: COUNTERCHECK_DATA, or the folder that the system gives a user's data."""
    stated = os.environ.get("COUNTERCHECK_DATA")
    if stated:
        return Path(stated).expanduser()
    home = Path.home()
    if sys.platform == "win32":
        return Path(os.environ.get("LOCALAPPDATA", home / "AppData" / "Local")) / "Countercheck"
    if sys.platform == "darwin":
        return home / "Library" / "Application Support" / "Countercheck"
    return Path(os.environ.get("XDG_DATA_HOME", home / ".local" / "share")) / "countercheck"


def read(token: str) -> tuple[str, int] | None:
    """Text and revision of a draft; None where there is none. Raises OSError or sqlite3.Error."""
    if not _TOKEN.fullmatch(token) or not (folder() / "drafts.sqlite3").exists():
        return None
    with _file() as file:
        oldest = time.time() - DAYS_KEPT * 86400
        row = file.execute("SELECT text, revision FROM draft WHERE key = ? AND changed > ?", (_key(token), oldest))
        return row.fetchone()


def write(token: str, text: str, revision: int) -> int | None:
    """Keep a draft in one transaction. `revision` is the one that this change builds on, 0 for a new draft.

    Returns the new revision, or None where somebody else changed the draft in between: nothing is overwritten then.
    Raises OSError or sqlite3.Error, or ValueError for a text that is too large.
    """
    if len(text) > LARGEST:
        raise ValueError(f"the draft is over {LARGEST >> 20} MB")
    with _file() as file:
        file.execute("BEGIN IMMEDIATE")
        now = time.time()
        file.execute("DELETE FROM draft WHERE changed < ?", (now - DAYS_KEPT * 86400,))
        if revision == 0:
            file.execute("INSERT INTO draft VALUES (?, ?, ?, 1)", (_key(token), text, now))
        else:
            row = file.execute("SELECT revision FROM draft WHERE key = ?", (_key(token),)).fetchone()
            if row is not None and row[0] != revision:
                file.execute("ROLLBACK")
                return None
            file.execute("INSERT OR REPLACE INTO draft VALUES (?, ?, ?, ?)", (_key(token), text, now, revision + 1))
        file.execute("COMMIT")
        return revision + 1


def _key(token: str) -> str:
    return hashlib.sha256(token.encode()).hexdigest()


@contextmanager
def _file() -> Iterator[sqlite3.Connection]:
    place = folder()
    place.mkdir(parents=True, exist_ok=True, mode=0o700)
    path = place / "drafts.sqlite3"
    if not path.exists():
        path.touch(mode=0o600)
    file = sqlite3.connect(path, timeout=5, isolation_level=None)
    try:
        file.execute("PRAGMA journal_mode = WAL")
        file.execute("PRAGMA synchronous = NORMAL")
        file.execute(
            "CREATE TABLE IF NOT EXISTS draft "
            "(key TEXT PRIMARY KEY, text TEXT NOT NULL, changed REAL NOT NULL, revision INTEGER NOT NULL)"
        )
        yield file
    finally:
        file.close()
