/* @name@: kernel for @NAME@_SECTIONS sections in @title@, fixed point.
 *
 * Written by a2d; belongs to @name@.h. No allocation, no dependency.
 *   @name@_use      take the coefficients of a set at once
 *   @name@_reset    silence: clear what the sections remember of the signal
 *   @name@_ramp     move to another set's coefficients in equal steps, one a sample; 0 when it cannot
 *   @name@_process  filter a block of any length; in and out may be the same
 * A filter is ready after @name@_use and @name@_reset. @NAME@_NO_RAMP, defined before, leaves the ramp out.
 *
 * A sample is a word of @NAME@_SAMPLE_BITS bits in an int32_t, full scale at 2^@NAME@_SAMPLE_FRACTION; the bits above
 * are headroom. Sums are exact in 64 bits; a result is @rounded@ and @limited@.
 * >> must shift in copies of the sign, as every compiler of note does (C99 6.5.7 leaves it to the implementation).
 */
#ifndef @NAME@_KERNEL_H
#define @NAME@_KERNEL_H

#include "@name@.h"

#if @NAME@_DESIGN != @design@
#error "@name@_kernel.h and @name@.h come from different designs"
#endif
#if !@NAME@_NUMBER_FIXED || !@NAME@_STRUCTURE_@STRUCTURE@ || @NAME@_FEEDBACK_NEGATED != @negated@
#error "@name@_kernel.h and @name@.h differ in number format, structure or feedback sign"
#endif
typedef char @name@_shift_right_keeps_the_sign[(-1 >> 1) == -1 ? 1 : -1];

#define @NAME@_HIGHEST @highest@
#define @NAME@_RAMP_BITS 31 /* by which a moving coefficient is finer than a word */

@state@
typedef struct {
    @word@ values[@NAME@_SECTIONS][@NAME@_VALUES];
    int8_t fractions[@NAME@_SECTIONS][@NAME@_VALUES];
    int32_t output_shift;
#if !defined(@NAME@_NO_RAMP)
    uint32_t ramp_left;
    int64_t moving[@NAME@_SECTIONS][@NAME@_VALUES];
    int64_t steps[@NAME@_SECTIONS][@NAME@_VALUES];
    const @name@_set *target;
#endif
    @name@_state state[@NAME@_SECTIONS];
} @name@_filter;

static inline int32_t @name@_limit(int64_t sample)
{
@limit@
}

@section@
static inline void @name@_use(@name@_filter *filter, const @name@_set *set)
{
    uint32_t s, v;
    for (s = 0; s < @NAME@_SECTIONS; ++s) {
        for (v = 0; v < @NAME@_VALUES; ++v) {
            filter->values[s][v] = set->values[s][v];
            filter->fractions[s][v] = set->fractions[s][v];
        }
    }
    filter->output_shift = set->output_shift;
#if !defined(@NAME@_NO_RAMP)
    filter->target = set;
    filter->ramp_left = 0;
#endif
}

static inline void @name@_reset(@name@_filter *filter)
{
    uint32_t s;
    for (s = 0; s < @NAME@_SECTIONS; ++s) {
        @name@_silence(&filter->state[s]);
    }
}

#if !defined(@NAME@_NO_RAMP)
/* Sets whose output shifts differ have gain in different places: the result is then 0, and nothing has changed. */
static inline int @name@_ramp(@name@_filter *filter, const @name@_set *set, uint32_t samples)
{
    const int64_t one = (int64_t)1 << @NAME@_RAMP_BITS;
    uint32_t s, v;
    if (set->output_shift != filter->output_shift) {
        return 0;
    }
    if (samples == 0) {
        @name@_use(filter, set);
        return 1;
    }
    for (s = 0; s < @NAME@_SECTIONS; ++s) {
        for (v = 0; v < @NAME@_VALUES; ++v) {
            const int8_t from = filter->fractions[s][v], to = set->fractions[s][v];
            const int8_t fraction = (int8_t)(from < to ? from : to); /* both ends in the coarser word */
            const int64_t start = (filter->values[s][v] * one) >> (from - fraction);
            const int64_t end = (set->values[s][v] * one) >> (to - fraction);
            filter->fractions[s][v] = fraction;
            filter->moving[s][v] = start;
            filter->steps[s][v] = (end - start) / (int64_t)samples;
        }
    }
    filter->target = set;
    filter->ramp_left = samples;
    return 1;
}

/* One section over a part of a ramp. */
static inline void @name@_glide(@name@_filter *filter, uint32_t s, const int32_t *in, int32_t *out, uint32_t count)
{
    uint32_t i, v;
    for (i = 0; i < count; ++i) {
        for (v = 0; v < @NAME@_VALUES; ++v) {
            filter->moving[s][v] += filter->steps[s][v];
            filter->values[s][v] = (@word@)(filter->moving[s][v] >> @NAME@_RAMP_BITS);
        }
        @name@_section(filter->values[s], filter->fractions[s], &filter->state[s], in + i, out + i, 1);
    }
}
#endif /* @NAME@_NO_RAMP */

static inline void @name@_shift_output(const @name@_filter *filter, int32_t *out, uint32_t count)
{
    const int64_t gain = (int64_t)1 << filter->output_shift;
    uint32_t i;
    for (i = 0; i < count && filter->output_shift != 0; ++i) {
        out[i] = @name@_limit(out[i] * gain);
    }
}

static inline void @name@_process(@name@_filter *filter, const int32_t *in, int32_t *out, uint32_t count)
{
    uint32_t s;
#if !defined(@NAME@_NO_RAMP)
    if (filter->ramp_left > 0) {
        const uint32_t part = filter->ramp_left < count ? filter->ramp_left : count;
        for (s = 0; s < @NAME@_SECTIONS; ++s) {
            @name@_glide(filter, s, s == 0 ? in : out, out, part);
        }
        @name@_shift_output(filter, out, part);
        filter->ramp_left -= part;
        if (filter->ramp_left == 0) {
            @name@_use(filter, filter->target);
        }
        in += part;
        out += part;
        count -= part;
    }
#endif
    for (s = 0; s < @NAME@_SECTIONS; ++s) {
        @name@_section(filter->values[s], filter->fractions[s], &filter->state[s], s == 0 ? in : out, out, count);
    }
    @name@_shift_output(filter, out, count);
}

#endif /* @NAME@_KERNEL_H */
