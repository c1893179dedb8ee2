"""The explanations that compete, one class each; their shared machinery is in ``base``, ``seen_star`` and ``orbit``.

:func:`vetter.scenarios.base.registered` lists them all; none of them knows of samplers.
"""
