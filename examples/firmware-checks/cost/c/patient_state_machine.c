/* Four states with confirm 3, patience 3 and a lock-out of 4 ticks, alike for both changes. */
#include "yard.h"

enum { CONFIRM = 3, PATIENCE = 3, LOCKOUT = 4 };

struct patient_state_machine {
    uint8_t output;
    uint8_t seen;
    uint8_t agree;
    uint8_t locked;
};

static inline int patient_state_machine(struct patient_state_machine *s, uint8_t sample)
{
    if (s->locked) {
        s->locked--;
        return NONE;
    }
    if (sample == s->output) {
        if (s->seen && ++s->agree >= PATIENCE) {
            s->seen = 0;
            s->agree = 0;
        }
        return NONE;
    }
    s->agree = 0;
    if (++s->seen < CONFIRM)
        return NONE;
    s->seen = 0;
    s->output = sample;
    s->locked = LOCKOUT;
    return sample ? MAKE : BREAK;
}

CONTENDER(patient_state_machine, struct patient_state_machine)
