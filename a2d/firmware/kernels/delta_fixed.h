static inline void @name@_silence(@name@_state *state)
{
    state->v1 = state->v2 = 0;
}

/* A word brought to the states' resolution, and by how many bits its products are still finer. */
static inline int64_t @name@_aligned(int32_t word, int8_t fraction)
{
    return fraction < @NAME@_GUARD ? word * ((int64_t)1 << (@NAME@_GUARD - fraction)) : word;
}

static inline int @name@_finer(int8_t fraction)
{
    return fraction < @NAME@_GUARD ? 0 : fraction - @NAME@_GUARD;
}

/* A section that saturates must not wind its states up. */
static inline int64_t @name@_clamped(int64_t v)
{
    if ((uint64_t)(v + @NAME@_STATE_LIMIT) > 2u * (uint64_t)@NAME@_STATE_LIMIT) {
        return v > 0 ? @NAME@_STATE_LIMIT : -@NAME@_STATE_LIMIT;
    }
    return v;
}

static inline void @name@_section(const @word@ *c, const int8_t *fractions, @name@_state *state, const int32_t *in,
                                  int32_t *out, uint32_t count)
{
    const int64_t b0 = @name@_aligned(c[@NAME@_B0], fractions[@NAME@_B0]);
    const int64_t b1 = @name@_aligned(c[@NAME@_B1], fractions[@NAME@_B1]);
    const int64_t b2 = @name@_aligned(c[@NAME@_B2], fractions[@NAME@_B2]);
    const int64_t a1 = @stored_sign@@name@_aligned(c[@NAME@_A1], fractions[@NAME@_A1]);
    const int64_t a2 = @stored_sign@@name@_aligned(c[@NAME@_A2], fractions[@NAME@_A2]);
    const int r0 = @name@_finer(fractions[@NAME@_B0]), r1 = @name@_finer(fractions[@NAME@_B1]);
    const int r2 = @name@_finer(fractions[@NAME@_B2]);
    const int q1 = @name@_finer(fractions[@NAME@_A1]), q2 = @name@_finer(fractions[@NAME@_A2]);
    const int64_t half = @guard_half@;
    int64_t v1 = state->v1, v2 = state->v2;
    uint32_t i;
    for (i = 0; i < count; ++i) {
        const int32_t x = in[i];
        const int32_t y = @name@_limit((((b0 * x) >> r0) + v1 + half) >> @NAME@_GUARD);
        v1 = @name@_clamped(v1 + v2 + ((b1 * x) >> r1) - ((a1 * y) >> q1));
        v2 = @name@_clamped(v2 + ((b2 * x) >> r2) - ((a2 * y) >> q2));
        out[i] = y;
    }
    state->v1 = v1;
    state->v2 = v2;
}
