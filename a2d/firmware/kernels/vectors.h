/* @name@: test vectors, an input and the output that @name@.h and its difference equation give.
 *
 * Written by a2d. For each sample rate: impulse, pause, noise, step, silence, from a filter that was just reset.
 * @name@_failures runs them through any implementation; 0 means that it is right.
 */
#ifndef @NAME@_VECTORS_H
#define @NAME@_VECTORS_H

#include "@name@.h"

#if @NAME@_DESIGN != @design@
#error "@name@_vectors.h and @name@.h come from different designs"
#endif

#define @NAME@_VECTOR_LENGTH @length@
#define @NAME@_LONGEST_BLOCK 64

static const @sample@ @name@_vector_input[@NAME@_VECTOR_LENGTH] = {
@input@
};

/* One row a sample rate, in the order of @name@_sets. */
static const @sample@ @name@_vector_output[@NAME@_RATES][@NAME@_VECTOR_LENGTH] = {
@outputs@
};

/* How far an output may be off. @tolerance_reason@ */
static const @sample@ @name@_vector_tolerance[@NAME@_RATES] = { @tolerances@ };

typedef void (*@name@_start_function)(void *filter, const @name@_set *set); /* take the set, be silent */
typedef void (*@name@_process_function)(void *filter, const @sample@ *in, @sample@ *out, uint32_t count);

/* How many output samples of set number `rate` are wrong when the input comes in blocks of `block` (1 to 64). */
static inline uint32_t @name@_failures(uint32_t rate, uint32_t block, void *filter, @name@_start_function start,
                                       @name@_process_function process)
{
    @sample@ out[@NAME@_LONGEST_BLOCK];
    const @sample@ allowed = @name@_vector_tolerance[rate];
    uint32_t done, i, failures = 0;
    start(filter, &@name@_sets[rate]);
    for (done = 0; done < @NAME@_VECTOR_LENGTH; done += block) {
        const uint32_t left = @NAME@_VECTOR_LENGTH - done;
        const uint32_t count = left < block ? left : block;
        process(filter, @name@_vector_input + done, out, count);
        for (i = 0; i < count; ++i) {
            const @sample@ off = out[i] - @name@_vector_output[rate][done + i];
            failures += !(off <= allowed && -off <= allowed); /* what is no number fails too */
        }
    }
    return failures;
}

#endif /* @NAME@_VECTORS_H */
