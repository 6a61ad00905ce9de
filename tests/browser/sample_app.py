"""A small app for the tests and the bench: three sliders, an answer, three diagrams of an invented fluid.

SAMPLE_PICTURES=none leaves the diagrams away, SAMPLE_PICTURES=replaced draws them with Streamlit's own element.
In the query, ``pages`` adds a second page, ``follow`` lets the process window follow the temperature, and ``free``
leaves the ranges of the axes to Plotly.
"""

import os
import sys
from pathlib import Path

import numpy as np
import streamlit as st

sys.path.insert(0, str(Path(__file__).parents[2]))

from sample_figures import diagram

from engine.screen import address, live

PICTURES = os.environ.get("SAMPLE_PICTURES", "live")


def row():
    st.markdown(f"### The answer is {np.hypot(line, temperature) + exhaust:.4f}")
    further = st.checkbox("Further path")
    ways = {way: way in st.session_state.asked for way in ("follow", "free")}
    diagrams = [
        diagram(number, name, line, exhaust, temperature, further=further, **ways) for number, name in enumerate("abc")
    ]
    if PICTURES == "live":
        live.show(diagrams, key="row")
    elif PICTURES == "replaced":
        for place, drawn in zip(st.columns(3), diagrams, strict=True):
            place.plotly_chart(drawn.painted(), key=drawn.key, height=420, config={"showSendToCloud": False})
    st.caption("Below the diagrams.")


def other():
    st.write("The other page.")


st.set_page_config(page_title="Sample", page_icon="♨️", layout="wide")
if "asked" not in st.session_state:
    st.session_state.asked = st.query_params.to_dict()
pages = [st.Page(row, title="Row", default=True), st.Page(other, title="Other")]
page = st.navigation(pages if "pages" in st.session_state.asked else pages[:1])
left, middle, right = st.columns(3)
line = left.slider("Line pressure", 1.0, 100.0, 10.0, 0.5, key="line")
exhaust = middle.slider("Exhaust pressure", 1.0, 10.0, 1.0, 0.1, key="exhaust")
temperature = right.slider("Measured temperature", 50.0, 250.0, 120.0, 0.5, key="temperature")
if "pages" in st.session_state.asked:
    st.write("Opened with", st.session_state.asked.get("case", "nothing"))
    address.keep(page.url_path, case=f"{line}-{exhaust}-{temperature}")
page.run()
