"""The bar and the rehearsal alone, wherever the product shows it."""

import sys
from pathlib import Path

import streamlit as st

ROOT = Path(__file__).parents[2]
sys.path.insert(0, str(ROOT))

from engine.screen import shell  # noqa: E402

st.set_page_config(page_title="Rehearsal", page_icon="♨️", layout="wide")
shell.run((st.Page(ROOT / "engine/screen/pages/rehearsal.py", title="Rehearsal", default=True),))
