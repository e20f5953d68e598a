/* Four states, each waiting one with a count; begins anew after every contrary sample. */
#include "yard.h"

enum { CONFIRM = 16 };
enum phase { IS_OPEN, IS_CLOSING, IS_CLOSED, IS_OPENING };

struct state_machine {
    uint8_t phase;
    uint8_t count;
};

static inline int state_machine(struct state_machine *s, uint8_t sample)
{
    switch (s->phase) {
    case IS_OPEN:
        if (sample) {
            s->phase = IS_CLOSING;
            s->count = 1;
        }
        return NONE;
    case IS_CLOSING:
        if (!sample) {
            s->phase = IS_OPEN;
            return NONE;
        }
        if (++s->count < CONFIRM)
            return NONE;
        s->phase = IS_CLOSED;
        return MAKE;
    case IS_CLOSED:
        if (!sample) {
            s->phase = IS_OPENING;
            s->count = 1;
        }
        return NONE;
    default:
        if (sample) {
            s->phase = IS_CLOSED;
            return NONE;
        }
        if (++s->count < CONFIRM)
            return NONE;
        s->phase = IS_OPEN;
        return BREAK;
    }
}

CONTENDER(state_machine, struct state_machine)
