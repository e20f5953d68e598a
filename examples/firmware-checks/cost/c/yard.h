/* What the C files share: the loop that a contender is measured in, as the Rust side has it. */
#ifndef YARD_H
#define YARD_H

#include <stdint.h>

enum { OPEN = 0, CLOSED = 1 };
enum edge { NONE = -1, BREAK = 0, MAKE = 1 };

/* What a program does at an edge: a call that returns at once. */
void cost_report(int edge);

/*
 * Takes every sample from `next` to `end`. The state is in memory between two ticks, as it is in a program that
 * does something else in between; the empty statement makes the compiler believe that.
 */
#define LOOP(name, state_type, step)                                                       \
    void name(const uint8_t *next, const uint8_t *end, state_type *state)                  \
    {                                                                                      \
        while (next != end) {                                                              \
            int edge = step(state, *next++);                                               \
            if (edge != NONE)                                                              \
                cost_report(edge);                                                         \
            __asm__ volatile("" : "+r"(next), "+r"(state) : : "memory");                   \
        }                                                                                  \
    }

/* The same law inlined, as a function of its own, and called. */
#define CONTENDER(name, state_type)                                                        \
    __attribute__((noinline)) int cost_c_##name##_step(state_type *state, uint8_t sample)  \
    {                                                                                      \
        return name(state, sample);                                                        \
    }                                                                                      \
    LOOP(cost_c_##name##_inlined, state_type, name)                                        \
    LOOP(cost_c_##name##_called, state_type, cost_c_##name##_step)

#endif
