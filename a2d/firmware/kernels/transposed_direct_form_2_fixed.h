static inline void @name@_silence(@name@_state *state)
{
    state->s1 = state->s2 = 0;
}

static inline void @name@_section(const @word@ *c, const int8_t *fractions, @name@_state *state, const int32_t *in,
                                  int32_t *out, uint32_t count)
{
    const int32_t b0 = c[@NAME@_B0], b1 = c[@NAME@_B1], b2 = c[@NAME@_B2], a1 = c[@NAME@_A1], a2 = c[@NAME@_A2];
    const int shift = fractions[0];
    const int64_t half = @half@;
    int64_t s1 = state->s1, s2 = state->s2;
    uint32_t i;
    for (i = 0; i < count; ++i) {
        const int32_t x = in[i];
        const int32_t y = @name@_limit(((int64_t)b0 * x + s1 + half) >> shift);
        s1 = (int64_t)b1 * x @minus@ (int64_t)a1 * y + s2;
        s2 = (int64_t)b2 * x @minus@ (int64_t)a2 * y;
        out[i] = y;
    }
    state->s1 = s1;
    state->s2 = s2;
}
