"""The page in the browser: ``streamlit run app.py``."""

from pathlib import Path

import streamlit as st

import envcorr.page
from envcorr.page.headers import fault, middleware

app = st.App(Path(envcorr.page.__file__).with_name("main.py"), middleware=middleware(), on_script_error=fault)
