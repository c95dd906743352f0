"""What Streamlit serves: the pages of main.py behind the headers of headers.py.

Streamlit finds the application by this module's own words, so that it is imported here by name.
"""

from pathlib import Path

import streamlit as st

from envcorr.page.headers import fault, middleware

__all__ = ["app"]

app = st.App(Path(__file__).with_name("main.py"), middleware=middleware(), on_script_error=fault)
