"""Reinterpreting the bits of doubles, and array access that lets LLVM use vector instructions.

`load` and `store` skip numba's wrap-around of negative indices. `load_table` also promises (alias metadata) that no
store of the hot loop touches a table, without which LLVM refuses to vectorise ("cannot identify array bounds").
With NUMBA_DISABLE_JIT=1 the plain twins below take their place.
"""

import numpy as np
from llvmlite import ir
from numba import config, types
from numba.extending import intrinsic

if config.DISABLE_JIT:

    def bits_of(x):
        return np.float64(x).view(np.int64)

    def double_of(bits):
        return float(np.int64(bits).view(np.float64))

    def load(array, index):
        return array[index]

    def load_table(array, index):
        return array[index]

    def store(array, index, value):
        array[index] = value

else:

    @intrinsic
    def bits_of(typingctx, x):
        """The 64 bits of a double as int64."""

        def codegen(context, builder, signature, args):
            return builder.bitcast(args[0], ir.IntType(64))

        return types.int64(types.float64), codegen

    @intrinsic
    def double_of(typingctx, bits):
        """The double that has these 64 bits (int64)."""

        def codegen(context, builder, signature, args):
            return builder.bitcast(args[0], ir.DoubleType())

        return types.float64(types.int64), codegen

    def _table_scope(builder):
        module = builder.module
        domain = module.add_metadata([ir.MetaDataString(module, "swarm")])
        return module.add_metadata([module.add_metadata([ir.MetaDataString(module, "tables"), domain])])

    def _pointer(context, builder, array_type, array, index):
        return builder.gep(context.make_array(array_type)(context, builder, array).data, [index], inbounds=True)

    @intrinsic
    def load(typingctx, array, index):
        """array[index] of a lane array; index is int64 and in range."""

        def codegen(context, builder, signature, args):
            value = builder.load(_pointer(context, builder, signature.args[0], args[0], args[1]))
            value.set_metadata("noalias", _table_scope(builder))
            return value

        return array.dtype(array, types.int64), codegen

    @intrinsic
    def load_table(typingctx, array, index):
        """array[index] of a table that nothing writes to; index is int64 and in range."""

        def codegen(context, builder, signature, args):
            value = builder.load(_pointer(context, builder, signature.args[0], args[0], args[1]))
            value.set_metadata("alias.scope", _table_scope(builder))
            return value

        return array.dtype(array, types.int64), codegen

    @intrinsic
    def store(typingctx, array, index, value):
        """array[index] = value for a lane array; index is int64 and in range."""

        def codegen(context, builder, signature, args):
            written = builder.store(args[2], _pointer(context, builder, signature.args[0], args[0], args[1]))
            written.set_metadata("noalias", _table_scope(builder))
            return context.get_dummy_value()

        return types.void(array, types.int64, array.dtype), codegen
