/*
 * Vertical counters of 2 and of 3 bits for 32 inputs: bit i of every count lies in one word. A count is cleared by
 * every sample that agrees with the output.
 */
#include "yard.h"

struct bank_of_2_bits {
    uint32_t settled;
    uint32_t c0;
    uint32_t c1;
};

static inline void bank_of_2_bits(struct bank_of_2_bits *s, uint32_t port)
{
    uint32_t contrary = port ^ s->settled;
    uint32_t c0 = s->c0, c1 = s->c1;
    s->settled ^= contrary & c0 & c1;
    s->c1 = (c1 ^ c0) & contrary;
    s->c0 = ~c0 & contrary;
}

PORT_CONTENDER(bank_of_2_bits, struct bank_of_2_bits)

struct bank_of_3_bits {
    uint32_t settled;
    uint32_t c0;
    uint32_t c1;
    uint32_t c2;
};

static inline void bank_of_3_bits(struct bank_of_3_bits *s, uint32_t port)
{
    uint32_t contrary = port ^ s->settled;
    uint32_t c0 = s->c0, c1 = s->c1, c2 = s->c2;
    s->settled ^= contrary & c0 & c1 & c2;
    s->c2 = (c2 ^ (c1 & c0)) & contrary;
    s->c1 = (c1 ^ c0) & contrary;
    s->c0 = ~c0 & contrary;
}

PORT_CONTENDER(bank_of_3_bits, struct bank_of_3_bits)
