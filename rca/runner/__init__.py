"""Runs the notebooks through papermill and puts the report folder in place."""
