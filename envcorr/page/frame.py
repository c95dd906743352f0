"""The frame of all pages."""

from __future__ import annotations

__all__ = ["run"]


def run() -> None:
    """Draw the page that was asked for."""
    import streamlit as st

    from envcorr.page import others, room

    st.set_page_config(page_title="envcorr", page_icon="⚖", layout="wide")
    pages = [
        st.Page(room.draw, title="Room", url_path="room", default=True),
        st.Page(others.mass, title="Mass", url_path="mass"),
        st.Page(others.level, title="Level", url_path="level"),
        st.Page(others.air, title="Air", url_path="air"),
    ]
    st.navigation(pages, position="top").run()
