"""The Streamlit entry: set-up and navigation."""
