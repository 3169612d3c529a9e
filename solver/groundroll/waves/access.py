"""Loads and stores that tell the compiler which arrays are different memory.

Compiled code cannot know that two arrays never overlap: before a loop over many of them it compares all their
addresses, which costs as much as 200 cells' work, or gives up packed instructions. Here each load and store
names the family of its array; families lie in different memory, and the compiler is told so (LLVM's
`alias.scope` and `noalias` metadata). Inside a family it goes on checking.

An access tagged with the wrong family lets the compiler reorder what must not be: tag what the array IS.
Indices are unsigned and unchecked. With the JIT off the same names are plain Python.
"""

import numba
from numba import types
from numba.core.extending import intrinsic

# vx, vz | sxx, szz, sxz | properties and coefficients | rows of scratch | the terrain's helper fields |
# convolution variables of the absorbing edges
VELOCITY, STRESS, GROUND, WORK, HELPERS, EDGES = range(6)
# Memory variables, one family for each relaxation mechanism.
FIRST, SECOND, THIRD, FOURTH = range(6, 10)
FAMILIES = 10


def _tag(builder, instruction, family: int) -> None:
    """Say that `instruction` touches `family` and none of the others."""
    module = builder.module
    domain = module.add_metadata(["groundroll"])
    scopes = [module.add_metadata([f"family {number}", domain]) for number in range(FAMILIES)]
    others = scopes[:family] + scopes[family + 1 :]
    instruction.set_metadata("alias.scope", module.add_metadata([scopes[family]]))
    instruction.set_metadata("noalias", module.add_metadata(others))


def entry_of(context, builder, array_type, array, index):
    """Return the address of array[index]."""
    return builder.gep(context.make_array(array_type)(context, builder, array).data, [index], inbounds=True)


def _is_family(family) -> bool:
    return isinstance(family, types.IntegerLiteral)


if numba.config.DISABLE_JIT:

    def at(f, i, family):
        return f[i]

    def put(f, i, value, family):
        f[i] = value

else:

    @intrinsic(prefer_literal=True)
    def at(typing_context, f, i, family):
        """Return f[i] of a flat array that belongs to `family` (a constant)."""
        if not _is_family(family):
            return None

        def generate(context, builder, signature, arguments):
            value = builder.load(entry_of(context, builder, signature.args[0], *arguments[:2]))
            _tag(builder, value, family.literal_value)
            return value

        return f.dtype(f, i, family), generate

    @intrinsic(prefer_literal=True)
    def put(typing_context, f, i, value, family):
        """f[i] = value, of a flat array that belongs to `family` (a constant)."""
        if not _is_family(family):
            return None

        def generate(context, builder, signature, arguments):
            store = builder.store(arguments[2], entry_of(context, builder, signature.args[0], *arguments[:2]))
            _tag(builder, store, family.literal_value)
            return context.get_dummy_value()

        return types.void(f, i, f.dtype, family), generate
