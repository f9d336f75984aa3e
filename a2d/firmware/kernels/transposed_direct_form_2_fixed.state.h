typedef struct {
    int64_t s1, s2;
} @name@_state;
