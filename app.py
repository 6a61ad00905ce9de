"""The door: page configuration and the list of pages. Start with ``streamlit run app.py``."""

import streamlit as st

from engine.screen import shell

st.set_page_config(page_title="Steam quality by throttling", page_icon="♨️", layout="wide")

PAGES = (
    st.Page("engine/screen/pages/path.py", title="Path", default=True),
    st.Page("engine/screen/pages/reach.py", title="Reach"),
    st.Page("engine/screen/pages/rig.py", title="Rig"),
    st.Page("engine/screen/pages/readings.py", title="Readings"),
    st.Page("engine/screen/pages/runsheet.py", title="Run sheet"),
    st.Page("engine/screen/pages/record.py", title="Record"),
)

shell.run(PAGES)
