/* @name@: runs the test vectors through the kernel; the exit status is 0 when every sample is right.
 *
 *   cc -std=c99 @name@_check.c -o @name@_check && ./@name@_check
 */
#include <stdio.h>

#include "@name@_kernel.h"
#include "@name@_vectors.h"

static void start(void *filter, const @name@_set *set)
{
    @name@_use((@name@_filter *)filter, set);
    @name@_reset((@name@_filter *)filter);
}

static void process(void *filter, const @sample@ *in, @sample@ *out, uint32_t count)
{
    @name@_process((@name@_filter *)filter, in, out, count);
}

int main(void)
{
    static const uint32_t blocks[3] = { 1, 7, 64 };
    static @name@_filter filter;
    uint32_t rate, b, all = 0;
    for (rate = 0; rate < @NAME@_RATES; ++rate) {
        for (b = 0; b < 3; ++b) {
            const uint32_t failures = @name@_failures(rate, blocks[b], &filter, start, process);
            printf("@name@ at %lu Hz in blocks of %lu: %lu of %d samples are wrong\n",
                   (unsigned long)@name@_sets[rate].fs_hz, (unsigned long)blocks[b], (unsigned long)failures,
                   @NAME@_VECTOR_LENGTH);
            all += failures;
        }
    }
    return all != 0;
}
