typedef struct {
    int32_t x1, x2, y1, y2;
#if @NAME@_ERROR_FEEDBACK > 0
    int64_t e1, e2; /* what rounding dropped */
#endif
} @name@_state;
