/* The last 16 samples in a word: the output changes when they are all alike. */
#include "yard.h"

struct shift_register {
    uint16_t window;
    uint8_t output;
};

static inline int shift_register(struct shift_register *s, uint8_t sample)
{
    s->window = (uint16_t)(s->window << 1 | sample);
    if (s->window == 0xffff) {
        if (s->output != CLOSED) {
            s->output = CLOSED;
            return MAKE;
        }
    } else if (s->window == 0) {
        if (s->output != OPEN) {
            s->output = OPEN;
            return BREAK;
        }
    }
    return NONE;
}

CONTENDER(shift_register, struct shift_register)
