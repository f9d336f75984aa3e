/* state: v1, v2 */
static inline void @name@_section(const @value@ *c, @value@ *state, const @value@ *in, @value@ *out, uint32_t count)
{
    const @value@ b0 = c[@NAME@_B0], b1 = c[@NAME@_B1], b2 = c[@NAME@_B2], a1 = c[@NAME@_A1], a2 = c[@NAME@_A2];
    @value@ v1 = state[0], v2 = state[1];
    uint32_t i;
    for (i = 0; i < count; ++i) {
        const @value@ x = in[i];
        const @value@ y = b0 * x + v1;
        v1 += v2 + (b1 * x @minus@ a1 * y);
        v2 += b2 * x @minus@ a2 * y;
        out[i] = y;
    }
    state[0] = v1;
    state[1] = v2;
}
