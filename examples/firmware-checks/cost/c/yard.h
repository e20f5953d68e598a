/* What the C files share: the loop that a contender is measured in, as the Rust side has it. */
#ifndef YARD_H
#define YARD_H

#include <stdint.h>

enum { OPEN = 0, CLOSED = 1 };
enum edge { NONE = -1, BREAK = 0, MAKE = 1 };

/* What a program does at an edge: a call that returns at once. */
void cost_report(int edge);

/* What `next` gives at the end: no address of a sample, and not 0, for which some branches are shorter. */
enum { END = 1 };

/* Gives the samples one by one and notes the time at each, as the Rust side has it. */
struct feed {
    const uint8_t *last;
    uint32_t *note;
    const volatile uint32_t *clock;
    const void *end;
};

/* The place of the next sample, none at the end; the same instructions as on the Rust side. */
#ifdef __riscv
#define NEXT_INSTRUCTIONS(size)    \
    "csrr %1, minstret\n"          \
    "lw %0, 4(%2)\n"               \
    "sw %1, 0(%0)\n"               \
    "addi %0, %0, 4\n"             \
    "sw %0, 4(%2)\n"               \
    "lw %0, 0(%2)\n"               \
    "addi %0, %0, " size "\n"      \
    "sw %0, 0(%2)\n"               \
    "lw %1, 12(%2)\n"              \
    "sub %1, %1, %0\n"             \
    "snez %1, %1\n"                \
    "neg %1, %1\n"                 \
    "and %0, %0, %1\n"             \
    "addi %1, %1, 1\n"             \
    "or %0, %0, %1\n"
#define ANY_REGISTER "r"
#define CHANGED "memory"
#else
#define NEXT_INSTRUCTIONS(size)    \
    ".syntax unified\n"            \
    "ldr %1, [%2, #8]\n"           \
    "ldr %1, [%1]\n"               \
    "ldr %0, [%2, #4]\n"           \
    "str %1, [%0]\n"               \
    "adds %0, #4\n"                \
    "str %0, [%2, #4]\n"           \
    "ldr %0, [%2]\n"               \
    "adds %0, #" size "\n"         \
    "str %0, [%2]\n"               \
    "ldr %1, [%2, #12]\n"          \
    "subs %1, %1, %0\n"            \
    "subs %1, #1\n"                \
    "sbcs %1, %1\n"                \
    "bics %0, %1\n"                \
    "subs %0, %0, %1\n"
#define ANY_REGISTER "l"
#define CHANGED "memory", "cc"
#endif

#define NEXT(name, sample_type, size)                                                      \
    static inline const sample_type *name(struct feed *feed)                               \
    {                                                                                      \
        const sample_type *place;                                                          \
        uint32_t more;                                                                     \
        __asm__ volatile(NEXT_INSTRUCTIONS(size)                                           \
                         : "=&" ANY_REGISTER(place), "=&" ANY_REGISTER(more)               \
                         : ANY_REGISTER(feed)                                              \
                         : CHANGED);                                                       \
        return place;                                                                      \
    }

NEXT(next_sample, uint8_t, "1")
NEXT(next_port, uint32_t, "4")

/* Takes the samples that the feed gives until there is none left, with the state in memory. */
#define LOOP(name, state_type, step)                                                       \
    void name(struct feed *feed, state_type *state)                    \
    {                                                                                      \
        for (;;) {                                                                         \
            const uint8_t *place = next_sample(feed);                                             \
            if ((uintptr_t)place == END)                                                   \
                break;                                                                     \
            int edge = step(state, *place);                                                \
            if (edge != NONE)                                                              \
                cost_report(edge);                                                         \
        }                                                                                  \
    }

/* The same, the state holding the output, and nobody looking at a change. */
#define PORT_LOOP(name, state_type, step)                                                  \
    void name(struct feed *feed, state_type *state)                   \
    {                                                                                      \
        for (;;) {                                                                         \
            const uint32_t *place = next_port(feed);                                       \
            if ((uintptr_t)place == END)                                                   \
                break;                                                                     \
            step(state, *place);                                                           \
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

#define PORT_CONTENDER(name, state_type)                                                   \
    __attribute__((noinline)) void cost_c_##name##_step(state_type *state, uint32_t port)  \
    {                                                                                      \
        name(state, port);                                                                 \
    }                                                                                      \
    PORT_LOOP(cost_c_##name##_inlined, state_type, name)                                   \
    PORT_LOOP(cost_c_##name##_called, state_type, cost_c_##name##_step)

#endif
