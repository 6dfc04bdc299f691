"""Reinterpreting the bits of doubles, and array access that lets LLVM use vector instructions.

`load` and `store` skip numba's wrap-around of negative indices. All lane data, integers and random words too, live in
one float64 array: with a single base pointer and constant strides LLVM needs no run-time overlap checks. `load_table`
also promises (alias metadata) that no store of the hot loop touches a table, without which LLVM refuses to vectorise
("cannot identify array bounds").
With NUMBA_DISABLE_JIT=1 the plain twins below take their place.
"""

import numpy as np
from llvmlite import ir
from llvmlite.binding import get_host_cpu_features
from numba import config, types
from numba.extending import intrinsic

if config.DISABLE_JIT:  # type: ignore[attr-defined]

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

    def prefer_wide_vectors():
        return None

    def load_int(array, index):
        return array[index : index + 1].view(np.int64)[0]

    def store_int(array, index, value):
        array[index : index + 1].view(np.int64)[0] = value

    def load_word(array, index):
        return array[index : index + 1].view(np.uint64)[0]

    def store_word(array, index, value):
        array[index : index + 1].view(np.uint64)[0] = value

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

    def _reader(result, metadata):
        def codegen(context, builder, signature, args):
            value = builder.load(_pointer(context, builder, signature.args[0], args[0], args[1]))
            value.set_metadata(metadata, _table_scope(builder))
            if result in (types.int64, types.uint64):
                return builder.bitcast(value, ir.IntType(64))
            return value

        return codegen

    def _writer(context, builder, signature, args):
        value = args[2]
        if signature.args[2] in (types.int64, types.uint64) and signature.args[0].dtype == types.float64:
            value = builder.bitcast(value, ir.DoubleType())
        written = builder.store(value, _pointer(context, builder, signature.args[0], args[0], args[1]))
        written.set_metadata("noalias", _table_scope(builder))
        return context.get_dummy_value()

    @intrinsic
    def load(typingctx, array, index):
        """array[index] of an array that changes; index is int64 and in range."""
        return array.dtype(array, types.int64), _reader(array.dtype, "noalias")

    @intrinsic
    def load_table(typingctx, array, index):
        """array[index] of a table that nothing writes to; index is int64 and in range."""
        return array.dtype(array, types.int64), _reader(array.dtype, "alias.scope")

    @intrinsic
    def store(typingctx, array, index, value):
        """array[index] = value; index is int64 and in range."""
        return types.void(array, types.int64, array.dtype), _writer

    @intrinsic
    def load_int(typingctx, array, index):
        """The int64 whose bits stand in array[index], a float64 array."""
        return types.int64(array, types.int64), _reader(types.int64, "noalias")

    @intrinsic
    def store_int(typingctx, array, index, value):
        """Put the bits of an int64 into array[index], a float64 array."""
        return types.void(array, types.int64, types.int64), _writer

    @intrinsic
    def load_word(typingctx, array, index):
        """The uint64 whose bits stand in array[index], a float64 array."""
        return types.uint64(array, types.int64), _reader(types.uint64, "noalias")

    @intrinsic
    def store_word(typingctx, array, index, value):
        """Put the bits of a uint64 into array[index], a float64 array."""
        return types.void(array, types.int64, types.uint64), _writer

    @intrinsic
    def prefer_wide_vectors(typingctx):
        """Let LLVM use 512-bit vectors in the calling function where the processor has them.

        LLVM holds back to 256 bits on most of these processors; the hot loop gains a third from the full width.
        """

        def codegen(context, builder, signature, args):
            # llvmlite knows no attributes with values: this one is added to the set as it is to be printed.
            set.add(builder.function.attributes, '"prefer-vector-width"="512"')
            return context.get_dummy_value()

        return types.void(), codegen


def vector_width() -> int:
    """Doubles in one vector of this processor as LLVM may use them: 8 (AVX-512), 4 (AVX) or 2 (SSE2)."""
    features = config.CPU_FEATURES or get_host_cpu_features().flatten()  # type: ignore[attr-defined]
    on = set(features.split(","))
    return 8 if "+avx512f" in on else 4 if "+avx" in on else 2
