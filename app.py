"""The page in the browser: ``streamlit run app.py``."""

from envcorr.page.frame import run

if __name__ == "__main__":
    run()
