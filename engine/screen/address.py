"""The page's address follows the case, without a history entry for every step of a slider."""

from __future__ import annotations

from engine.screen import served

_address = served.component("address.js", "address")


def keep(page: str, **query: str | None) -> None:
    """Write the values into the query of the address (``None`` takes a name out), other names stay.

    Call it once in every run, from the entry point, with the path of the page that is shown: Streamlit
    drops the query when the page changes, and a changed ``page`` writes it again. A reload, a bookmark
    and a copied address then open with what was kept last.

    The running session does not see it: Streamlit goes on reporting the query the page was opened with, so
    read ``st.query_params`` in the first run of a session only, and never write to it.
    """
    _address(data={"page": page, "query": query}, key="address")
