/* Saturating up/down count whose two ends are the thresholds, left early where it stands at an end. */
#include "yard.h"

enum { FULL_SCALE = 16 };

struct integrator {
    uint8_t count;
    uint8_t output;
};

static inline int integrator(struct integrator *s, uint8_t sample)
{
    if (sample) {
        if (s->count >= FULL_SCALE)
            return NONE;
        if (++s->count < FULL_SCALE || s->output == CLOSED)
            return NONE;
        s->output = CLOSED;
        return MAKE;
    }
    if (s->count == 0)
        return NONE;
    if (--s->count > 0 || s->output == OPEN)
        return NONE;
    s->output = OPEN;
    return BREAK;
}

CONTENDER(integrator, struct integrator)
