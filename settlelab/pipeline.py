"""Runs a study: stages in order, cached, in parallel, resumable."""
