"""How threads that advance neighbouring strips keep in step: each publishes a count, the others wait for it.

A count only grows. What a strip wrote before it published a count is seen by whoever has waited for that count
(release and acquire). `progress` holds the counts, SPREAD entries apart so that no two share a cache line.
With the JIT off the same names are plain Python.
"""

import sys
import time

import numba
from numba import types
from numba.core.extending import intrinsic

from groundroll.waves.access import entry_of
from groundroll.waves.jit import inline

SPREAD = 16
# Looks at a count before the thread lets another one have the core.
PATIENCE = 2000
ENTRY_BYTES = 8

if numba.config.DISABLE_JIT:

    def publish(progress, strip, count):
        progress[strip * SPREAD] = count

    def wait_for(progress, strip, count):
        while progress[strip * SPREAD] < count:
            time.sleep(0)

else:
    let_others_run = types.ExternalFunction("SwitchToThread" if sys.platform == "win32" else "sched_yield", types.int32())

    @intrinsic
    def _store(typing_context, counts, index, count):
        def generate(context, builder, signature, arguments):
            entry = entry_of(context, builder, signature.args[0], *arguments[:2])
            builder.store_atomic(arguments[2], entry, "release", ENTRY_BYTES)
            return context.get_dummy_value()

        return types.void(counts, types.intp, counts.dtype), generate

    @intrinsic
    def _load(typing_context, counts, index):
        def generate(context, builder, signature, arguments):
            entry = entry_of(context, builder, signature.args[0], *arguments)
            return builder.load_atomic(entry, "acquire", ENTRY_BYTES)

        return counts.dtype(counts, types.intp), generate

    @inline
    def publish(progress, strip, count):
        """Let every other thread know that `strip` has done `count` waves in all."""
        _store(progress, strip * SPREAD, count)

    @inline
    def wait_for(progress, strip, count):
        """Return once `strip` has done `count` waves."""
        looks = 0
        while _load(progress, strip * SPREAD) < count:
            looks += 1
            if looks > PATIENCE:
                let_others_run()
