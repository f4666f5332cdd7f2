"""How many small compiled functions become one piece of machine code in little time.

By itself numba optimises and translates each function together with all that it calls, so a deep tree of
small steps is worked through again at every level, and again for every constant a step is called with. Here
a step is compiled once for all whole numbers, and its code is only joined to that of its callees. The
function at the top, compiled as usual, is then optimised and translated once with everything in it.
"""

from __future__ import annotations

import functools
from typing import Any

__all__ = ["as_part", "for_whole_numbers"]


class _NoEnvironment:
    """Stands in for the engine that would give a function its Python objects; a step has none."""

    def set_env(self, name: str, environment: Any) -> None:
        """Do nothing."""


@functools.cache
def _part_kind() -> Any:
    """Numba's library of compiled code, except that it is neither optimised nor translated by itself."""
    from numba.core.codegen import JITCodeLibrary

    class Part(JITCodeLibrary):  # type: ignore[misc] # numba ships no type information
        """The code of a step and of all it calls, waiting to be joined to a caller's."""

        codegen = _NoEnvironment()

        def finalize(self) -> None:
            """Join the code of the callees, and leave it at that."""
            self._raise_if_finalized()
            for library in dict.fromkeys(self._linking_libraries):
                self._reload_init.update(library._reload_init)
                self._final_module.link_in(library._get_module_for_linking(), preserve=True)
            self._finalized = True

        def get_pointer_to_function(self, name: str) -> int:
            """There is no machine code to point to."""
            self._ensure_finalized()
            return 0

    return Part


def as_part(function: Any, alone: bool) -> None:
    """Have a numba function compiled as a part of its callers, or, where `alone`, as numba usually does.

    The latter has to be said too: a function that stands alone may be compiled while a part is.
    """
    from numba.core.codegen import JITCodeLibrary
    from numba.core.registry import cpu_target

    kind, usual = JITCodeLibrary if alone else _part_kind(), function.compile

    def compile_so(signature: Any) -> Any:
        codegen = cpu_target.target_context.codegen()
        before, codegen._library_class = codegen._library_class, kind
        try:
            return usual(signature)
        finally:
            codegen._library_class = before

    function.compile = compile_so


def for_whole_numbers(function: Any) -> None:
    """Have a numba function compiled once for all whole numbers, whatever their size, constants or not."""
    from numba.core import types
    from numba.core.types.misc import unliteral

    usual = function.get_call_template

    def wide(given: Any) -> Any:
        plain = unliteral(given)
        return types.int64 if isinstance(plain, types.Integer) else plain

    def template(args: tuple[Any, ...], named: dict[str, Any]) -> Any:
        return usual(tuple(map(wide, args)), {name: wide(given) for name, given in named.items()})

    function.get_call_template = template
