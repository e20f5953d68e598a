/* 5 of the last 8 samples decide. The set bits are counted by the usual sums of neighbours. */
#include "yard.h"

enum { MAJORITY = 5 };

struct majority_register {
    uint8_t window;
    uint8_t output;
};

static inline int majority_register(struct majority_register *s, uint8_t sample)
{
    unsigned window = (uint8_t)(s->window << 1 | sample);
    s->window = (uint8_t)window;
    if (window == 0 || window == 0xff) {
        if (s->output == sample)
            return NONE;
    }
    unsigned sum = window - (window >> 1 & 0x55);
    sum = (sum & 0x33) + (sum >> 2 & 0x33);
    sum = (sum + (sum >> 4)) & 0x0f;
    if (sum >= MAJORITY && s->output == OPEN) {
        s->output = CLOSED;
        return MAKE;
    }
    if (sum <= 8 - MAJORITY && s->output == CLOSED) {
        s->output = OPEN;
        return BREAK;
    }
    return NONE;
}

CONTENDER(majority_register, struct majority_register)
