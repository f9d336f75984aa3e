/* state: x[n-1], x[n-2], y[n-1], y[n-2] */
static inline void @name@_section(const @value@ *c, @value@ *state, const @value@ *in, @value@ *out, uint32_t count)
{
    const @value@ b0 = c[@NAME@_B0], b1 = c[@NAME@_B1], b2 = c[@NAME@_B2], a1 = c[@NAME@_A1], a2 = c[@NAME@_A2];
    @value@ x1 = state[0], x2 = state[1], y1 = state[2], y2 = state[3];
    uint32_t i;
    for (i = 0; i < count; ++i) {
        const @value@ x = in[i];
        const @value@ y = b0 * x + b1 * x1 + b2 * x2 @minus@ a1 * y1 @minus@ a2 * y2;
        x2 = x1;
        x1 = x;
        y2 = y1;
        y1 = y;
        out[i] = y;
    }
    state[0] = x1;
    state[1] = x2;
    state[2] = y1;
    state[3] = y2;
}
