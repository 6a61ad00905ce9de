"""The rehearsal on a page of its own."""

from __future__ import annotations

from engine.screen import rehearsal_view


def page() -> None:
    """A simulated rig to practise on."""
    rehearsal_view.show()


if __name__ == "__main__":
    page()
