"""The table of pages. Run with: streamlit run app/main.py"""

import sys
from pathlib import Path

import streamlit as st

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE.parent)]

from app import frame, page_case, page_rating, page_reach, page_report, page_sheet, page_trust  # noqa: E402

PAGES = (page_case, page_rating, page_reach, page_sheet, page_report, page_trust)

st.set_page_config(page_title="Countercheck", page_icon=str(HERE / "icon.svg"), layout="wide")
st.navigation(
    [
        st.Page(
            frame.drawn(page.show),
            title=page.TITLE,
            url_path=page.TITLE.lower().replace(" ", "-"),
            default=page is PAGES[0],
        )
        for page in PAGES
    ]
).run()
