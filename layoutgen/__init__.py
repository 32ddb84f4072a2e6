"""Comb-line band-pass filters, from specification to fabrication files.

Public names are imported on first use, so that ``import layoutgen`` loads no numerics.
"""

from __future__ import annotations

import sys
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

_HOME = {
    "load_spec": "layoutgen.spec",
    "Spec": "layoutgen.spec",
    "design": "layoutgen.design",
    "Design": "layoutgen.design",
    "Library": "layoutgen.library",
    "LayoutError": "layoutgen.errors",
    "InputError": "layoutgen.errors",
    "InputErrors": "layoutgen.errors",
}

__all__ = [*_HOME, "__version__"]

if TYPE_CHECKING:
    from layoutgen.design import Design as Design
    from layoutgen.design import design as design
    from layoutgen.errors import InputError as InputError
    from layoutgen.errors import InputErrors as InputErrors
    from layoutgen.errors import LayoutError as LayoutError
    from layoutgen.library import Library as Library
    from layoutgen.spec import Spec as Spec
    from layoutgen.spec import load_spec as load_spec


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module 'layoutgen' has no attribute {name!r}")
    return getattr(import_module(_HOME[name]), name)


def __dir__() -> list[str]:
    return sorted(__all__)


class _Package(ModuleType):
    """The package with ``design`` as the function, not the room of the same name.

    Python binds a submodule to its package when it is first imported, which would hide the function.
    """

    def __setattr__(self, name: str, value: object) -> None:
        if name == "design" and isinstance(value, ModuleType):
            return
        super().__setattr__(name, value)


sys.modules[__name__].__class__ = _Package
