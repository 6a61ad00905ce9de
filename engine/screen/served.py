"""Code for the browser: how our own components and Plotly's script get there, from this machine only."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from functools import lru_cache
from pathlib import Path

import plotly
import streamlit as st
from streamlit.components.v1 import declare_component

ASSETS = Path(__file__).parent / "assets"
PLOTLY = Path(plotly.__file__).parent / "package_data"


def component(file: str, function: str) -> Callable[..., object]:
    """A component that runs ``function`` of ``file`` in ``assets/`` whenever its data or the theme changes.

    What stands in ``js`` is sent again with every message, so it only loads the file, by address. The address
    starts where Streamlit's own scripts come from and so holds behind a proxy and under a base path; the
    digest in it makes a browser take the new file after an upgrade. Returns the mounting function of
    ``st.components.v2.component``.
    """
    digest = hashlib.blake2b((ASSETS / file).read_bytes(), digest_size=6).hexdigest()
    js = f"""
const start = document.querySelector('script[src*="static/js/"]').src.split('static/js/')[0];
const code = import(`${{start}}component/{__name__}.assets/{file}?{digest}`);
export default async (component) => (await code).{function}(component);
"""
    mount = st.components.v2.component(f"{Path(file).stem}-{function}", js=js, isolate_styles=False)

    def served(**parameters: object) -> None:
        _serve()
        mount(**parameters)

    return served


@lru_cache(maxsize=1)
def _serve() -> None:
    """Have the server hand out our files and Plotly's: once, by a script's run, for before that no server listens."""
    declare_component("assets", path=str(ASSETS))
    declare_component("plotly", path=str(PLOTLY))
