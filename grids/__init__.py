"""Data tables shipped with the package; see README.md beside this file for their provenance.

The tables are read with importlib.resources. ``build.py`` and ``recipes`` make them from public package archives and
are not needed at run time.
"""
