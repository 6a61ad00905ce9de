"""What the live diagrams send, without a browser; tests/browser has what becomes of it."""

import json

import pytest
from streamlit.testing.v1 import AppTest


def script():
    import streamlit as st

    from engine.screen import address, live
    from engine.screen.charts.diagram import Diagram

    end = st.slider("End", 0.0, 10.0, 1.0)
    path = {"type": "scatter", "x": [0.0, end], "y": [0.0, 1.0]}
    dome = {"type": "scatter", "x": list(range(3000)), "y": list(range(3000))}
    diagram = Diagram("Ts", "T–s", {"data": [dome, path], "layout": {}}, (1,), f"ends at {end}")
    address.keep("path", case=f"{end}", old=None)
    live.show([diagram], key="row", height=300, columns=2, enlarged="Ts")


def sent(app):
    """By component: what it gets."""
    protos = [element.proto for element in app.get("bidi_component")]
    return {proto.component_name: json.loads(proto.json) for proto in protos}


@pytest.fixture
def app():
    app = AppTest.from_function(script, default_timeout=30).run()
    assert not app.exception
    return app


def test_only_what_moves_changes_with_an_input(app):
    before = sent(app)
    app.slider[0].set_value(2.0).run()
    after = sent(app)
    assert after["live-background"] == before["live-background"]
    moving = json.loads(after["live-diagrams"])
    assert moving["diagrams"][0]["traces"][0]["x"] == [0, 2]
    assert moving["diagrams"][0]["label"] == "ends at 2.0"
    assert moving["background"] == json.loads(after["live-background"])["name"]


def test_the_settings_go_along(app):
    settings = json.loads(sent(app)["live-diagrams"])["settings"]
    assert settings == {"key": "row", "height": 300, "columns": 2, "enlarged": "Ts"}


def test_the_elements_keep_their_identity(app):
    ids = [element.proto.id for element in app.get("bidi_component")]
    app.slider[0].set_value(3.0).run()
    assert [element.proto.id for element in app.get("bidi_component")] == ids


def test_the_address_gets_the_page_and_the_query(app):
    assert sent(app)["address-address"] == {"page": "path", "query": {"case": "1.0", "old": None}}


def test_code_is_loaded_by_address_not_sent_each_time(app):
    for element in app.get("bidi_component"):
        assert len(element.proto.js_content) < 400
        assert "component/engine.screen.served.assets/" in element.proto.js_content
        assert "http" not in element.proto.js_content
