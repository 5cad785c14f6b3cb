"""The document: run in a fresh kernel, checked, exported, hardened. Imports no widget room."""
