/* state: s1, s2 */
static inline void @name@_section(const @value@ *c, @value@ *state, const @value@ *in, @value@ *out, uint32_t count)
{
    const @value@ b0 = c[@NAME@_B0], b1 = c[@NAME@_B1], b2 = c[@NAME@_B2], a1 = c[@NAME@_A1], a2 = c[@NAME@_A2];
    @value@ s1 = state[0], s2 = state[1];
    uint32_t i;
    for (i = 0; i < count; ++i) {
        const @value@ x = in[i];
        const @value@ y = b0 * x + s1;
        s1 = b1 * x @minus@ a1 * y + s2;
        s2 = b2 * x @minus@ a2 * y;
        out[i] = y;
    }
    state[0] = s1;
    state[1] = s2;
}
