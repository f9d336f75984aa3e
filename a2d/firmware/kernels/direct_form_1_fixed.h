static inline void @name@_silence(@name@_state *state)
{
    state->x1 = state->x2 = state->y1 = state->y2 = 0;
#if @NAME@_ERROR_FEEDBACK > 0
    state->e1 = state->e2 = 0;
#endif
}

static inline void @name@_section(const @word@ *c, const int8_t *fractions, @name@_state *state, const int32_t *in,
                                  int32_t *out, uint32_t count)
{
    const int32_t b0 = c[@NAME@_B0], b1 = c[@NAME@_B1], b2 = c[@NAME@_B2], a1 = c[@NAME@_A1], a2 = c[@NAME@_A2];
    const int shift = fractions[0];
    const int64_t half = @half@;
    int32_t x1 = state->x1, x2 = state->x2, y1 = state->y1, y2 = state->y2;
#if @NAME@_ERROR_FEEDBACK > 0
    const int64_t one = (int64_t)1 << shift;
    int64_t e1 = state->e1, e2 = state->e2;
#endif
    uint32_t i;
    for (i = 0; i < count; ++i) {
        const int32_t x = in[i];
        int64_t sum = (int64_t)b0 * x + (int64_t)b1 * x1 + (int64_t)b2 * x2;
        sum = sum @minus@ (int64_t)a1 * y1 @minus@ (int64_t)a2 * y2;
#if @NAME@_ERROR_FEEDBACK == 1
        sum += e1;
#elif @NAME@_ERROR_FEEDBACK == 2
        sum += 2 * e1 - e2;
#endif
        {
            const int64_t whole = (sum + half) >> shift;
#if @NAME@_ERROR_FEEDBACK > 0
            e2 = e1;
            e1 = sum - whole * one;
#endif
            x2 = x1;
            x1 = x;
            y2 = y1;
            y1 = @name@_limit(whole);
        }
        out[i] = y1;
    }
    state->x1 = x1;
    state->x2 = x2;
    state->y1 = y1;
    state->y2 = y2;
#if @NAME@_ERROR_FEEDBACK > 0
    state->e1 = e1;
    state->e2 = e2;
#endif
}
