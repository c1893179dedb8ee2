"""vetter: which ordinary explanations of an unseen stellar companion do the measurements exclude, and why.

The public interface: :func:`read_system` reads a system file, :func:`evaluate` fits every scenario to it and returns
:class:`Verdicts`; :func:`contrast` sets an inner pair against a single companion; :class:`InputError` is raised for bad
input.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from vetter.errors import InputError
    from vetter.evaluation import evaluate
    from vetter.pairs.contrast import contrast
    from vetter.results.verdicts import Verdicts
    from vetter.system.reader import read_system

__all__ = ["InputError", "Verdicts", "contrast", "evaluate", "read_system"]

_HOME = {
    "InputError": "vetter.errors",
    "Verdicts": "vetter.results.verdicts",
    "contrast": "vetter.pairs.contrast",
    "evaluate": "vetter.evaluation",
    "read_system": "vetter.system.reader",
}


def __getattr__(name: str) -> object:
    """Import the public names on first use, so that ``import vetter`` and ``vetter --help`` stay quick."""
    if name not in _HOME:
        raise AttributeError(f"module 'vetter' has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(_HOME[name]), name)
