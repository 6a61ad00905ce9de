"""The bar and the rehearsal alone, without the run sheet beside it."""

import sys
from pathlib import Path

import streamlit as st

sys.path.insert(0, str(Path(__file__).parents[2]))

from engine.screen import rehearsal_view, shell  # noqa: E402

st.set_page_config(page_title="Rehearsal", page_icon="♨️", layout="wide")
shell.run((st.Page(rehearsal_view.show, title="Rehearsal", default=True),))
