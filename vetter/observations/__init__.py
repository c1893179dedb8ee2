"""One file per kind of datum; each turns predicted quantities into standardised residuals.

:func:`vetter.observations.base.registered` lists them all; none of them knows of scenarios.
"""
