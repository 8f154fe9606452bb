"""How Numba compiles a function that only other compiled functions call: for linking, not for running.

Numba makes machine code of every function and optimises each together with all that it calls, so a tree
of calls is optimised once for every level. A function compiled by `Linked` stays as it was lowered; the
entry that calls it is optimised with all of them once, and only that becomes machine code.
"""

from __future__ import annotations

from typing import Any

from numba.core.codegen import JITCodeLibrary
from numba.core.compiler import CompilerBase, DefaultPassBuilder
from numba.core.compiler_machinery import register_pass
from numba.core.typed_passes import NativeLowering


class Unfinished(JITCodeLibrary):  # type: ignore[misc]
    """Lowered code that waits for the library into which it is linked."""

    def _optimize_final_module(self) -> None:
        pass

    def _finalize_final_module(self) -> None:
        self._finalized = True


@register_pass(mutates_CFG=True, analysis_only=False)
class LoweringForLinking(NativeLowering):  # type: ignore[misc]
    """Lowering without machine code."""

    _name = "lowering_for_linking"

    def run_pass(self, state: Any) -> bool:
        state.library = Unfinished(state.targetctx.codegen(), state.func_id.func_qualname)
        state.flags.no_compile = True
        super().run_pass(state)
        key: Any = [].append  # a name that nothing else has; nobody calls it
        state.targetctx.insert_user_function(key, state.cr.fndesc, [state.library])
        state.reload_init.extend(state.library._reload_init)
        state.cr = state.cr._replace(cfunc=key)
        return True


class Linked(CompilerBase):  # type: ignore[misc]
    """The usual pipeline of Numba with the lowering above."""

    def define_pipelines(self) -> list[Any]:
        usual = DefaultPassBuilder.define_nopython_pipeline(self.state)
        usual.passes = [
            (LoweringForLinking, why) if made is NativeLowering else (made, why) for made, why in usual.passes
        ]
        usual._finalized = False
        usual.finalize()
        return [usual]
