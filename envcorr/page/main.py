"""What Streamlit runs: ``streamlit run envcorr/page/main.py``, or ``envcorr page``."""

from envcorr.page.frame import run

__all__: list[str] = []

if __name__ == "__main__":
    run()
