"""Pages without a browser start quickly: Streamlit need not look through every installed package for components."""

import pytest
from streamlit.components.v2 import manifest_scanner


@pytest.fixture(autouse=True, scope="session")
def no_search_for_components():
    """Ours are registered by the app itself; the search would take longer than a run of the script."""
    patch = pytest.MonkeyPatch()
    patch.setattr(manifest_scanner, "scan_component_manifests", lambda *args, **kwargs: [])
    yield
    patch.undo()
