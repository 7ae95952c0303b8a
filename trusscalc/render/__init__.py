"""The sheet written out: text, notebook, drawings."""
