"""Runs the notebooks through papermill and puts the report folder in place."""

import rca.archive.lean_jsonschema  # noqa: F401  before nbformat imports the whole of it
