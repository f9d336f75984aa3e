#define @NAME@_GUARD @guard@ /* bits by which the states are finer than a sample */
#define @NAME@_STATE_LIMIT ((int64_t)1 << 60)

typedef struct {
    int64_t v1, v2;
} @name@_state;
