"""Date and time where the reader is."""

from __future__ import annotations

from datetime import datetime
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

import streamlit as st


def now(form: str = "%Y-%m-%d %H:%M") -> str:
    """Date and time by the reader's own clock, to the minute; by the server's where the browser does not say."""
    try:
        zone = ZoneInfo(st.context.timezone) if st.context.timezone else None
    except (ZoneInfoNotFoundError, ValueError):
        zone = None
    return datetime.now(zone).strftime(form)
