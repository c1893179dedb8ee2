"""Evidence and best fits of anything that can be written as weighted residuals in normal coordinates.

What to use when: :func:`vetter.inference.importance.sample` for ln evidence and posterior samples,
:func:`vetter.inference.optimise.minimise` for the largest likelihood, :mod:`vetter.inference.nested` for a slow,
independent evidence. None of them knows anything of stars.
"""
