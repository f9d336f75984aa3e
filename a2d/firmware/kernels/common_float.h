/* @name@: kernel for @NAME@_SECTIONS sections in @title@, @number@ samples.
 *
 * Written by a2d; belongs to @name@.h. No allocation, no dependency.
 *   @name@_use      take the coefficients of a set at once
 *   @name@_reset    silence: clear what the sections remember of the signal
 *   @name@_ramp     move to another set's coefficients in equal steps, one a sample
 *   @name@_process  filter a block of any length; in and out may be the same
 * A filter is ready after @name@_use and @name@_reset. @NAME@_NO_RAMP, defined before, leaves the ramp out. The steps of a ramp keep every moment of it stable: the
 * coefficients of stable sections form a convex set.
 */
#ifndef @NAME@_KERNEL_H
#define @NAME@_KERNEL_H

#include "@name@.h"

#if @NAME@_DESIGN != @design@
#error "@name@_kernel.h and @name@.h come from different designs"
#endif
#if !@NAME@_NUMBER_@NUMBER@ || !@NAME@_STRUCTURE_@STRUCTURE@ || @NAME@_FEEDBACK_NEGATED != @negated@
#error "@name@_kernel.h and @name@.h differ in number format, structure or feedback sign"
#endif

typedef struct {
    @value@ values[@NAME@_SECTIONS][@NAME@_VALUES];
#if !defined(@NAME@_NO_RAMP)
    @value@ steps[@NAME@_SECTIONS][@NAME@_VALUES];
    const @name@_set *target;
    uint32_t ramp_left;
#endif
    @value@ state[@NAME@_SECTIONS][@states@];
} @name@_filter;

@section@
static inline void @name@_use(@name@_filter *filter, const @name@_set *set)
{
    uint32_t s, v;
    for (s = 0; s < @NAME@_SECTIONS; ++s) {
        for (v = 0; v < @NAME@_VALUES; ++v) {
            filter->values[s][v] = set->values[s][v];
        }
    }
#if !defined(@NAME@_NO_RAMP)
    filter->target = set;
    filter->ramp_left = 0;
#endif
}

static inline void @name@_reset(@name@_filter *filter)
{
    uint32_t s, v;
    for (s = 0; s < @NAME@_SECTIONS; ++s) {
        for (v = 0; v < @states@; ++v) {
            filter->state[s][v] = @zero@;
        }
    }
}

#if !defined(@NAME@_NO_RAMP)
static inline void @name@_ramp(@name@_filter *filter, const @name@_set *set, uint32_t samples)
{
    uint32_t s, v;
    if (samples == 0) {
        @name@_use(filter, set);
        return;
    }
    for (s = 0; s < @NAME@_SECTIONS; ++s) {
        for (v = 0; v < @NAME@_VALUES; ++v) {
            filter->steps[s][v] = (set->values[s][v] - filter->values[s][v]) / (@value@)samples;
        }
    }
    filter->target = set;
    filter->ramp_left = samples;
}

/* One section over a part of a ramp. */
static inline void @name@_glide(@name@_filter *filter, uint32_t s, const @value@ *in, @value@ *out, uint32_t count)
{
    uint32_t i, v;
    for (i = 0; i < count; ++i) {
        for (v = 0; v < @NAME@_VALUES; ++v) {
            filter->values[s][v] += filter->steps[s][v];
        }
        @name@_section(filter->values[s], filter->state[s], in + i, out + i, 1);
    }
}
#endif /* @NAME@_NO_RAMP */

static inline void @name@_process(@name@_filter *filter, const @value@ *in, @value@ *out, uint32_t count)
{
    uint32_t s;
#if !defined(@NAME@_NO_RAMP)
    if (filter->ramp_left > 0) {
        const uint32_t part = filter->ramp_left < count ? filter->ramp_left : count;
        for (s = 0; s < @NAME@_SECTIONS; ++s) {
            @name@_glide(filter, s, s == 0 ? in : out, out, part);
        }
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
        @name@_section(filter->values[s], filter->state[s], s == 0 ? in : out, out, count);
    }
}

#endif /* @NAME@_KERNEL_H */
