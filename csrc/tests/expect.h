/* expect: what a test program needs and no more. Counts, prints each failure, ends with one line and an exit status. */
#ifndef TW_EXPECT_H
#define TW_EXPECT_H

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

static long check_passed;
static long check_failed;

static inline void check_one(int holds, const char *file, int line, const char *text)
{
    if (holds) {
        check_passed++;
    } else {
        check_failed++;
        printf("%s:%d: fails: %s\n", file, line, text);
    }
}

/* |a - b| <= tolerance; NaN fails. */
static inline void check_near(double a, double b, double tolerance, const char *file, int line, const char *text)
{
    int holds = fabs(a - b) <= tolerance;
    check_one(holds, file, line, text);
    if (!holds) {
        printf("    %.17g against %.17g: off by %.3g, allowed %.3g\n", a, b, fabs(a - b), tolerance);
    }
}

static inline int check_end(const char *name)
{
    printf("%s: %ld passed, %ld failed\n", name, check_passed, check_failed);
    return check_failed == 0 && check_passed > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}

/* Drawn numbers that are the same on every machine (Marsaglia's xorshift, 64 bit), in [-1, 1). */
static inline double check_draw(unsigned long long *state)
{
    *state ^= *state << 13;
    *state ^= *state >> 7;
    *state ^= *state << 17;
    return (double)(*state >> 11) * (2.0 / 9007199254740992.0) - 1.0;
}

#define CHECK(condition) check_one((condition) ? 1 : 0, __FILE__, __LINE__, #condition)
#define CHECK_NEAR(a, b, tolerance) check_near((a), (b), (tolerance), __FILE__, __LINE__, #a " ~ " #b)
#define CHECK_REL(a, b, tolerance) check_near((a), (b), (tolerance) * fabs(b), __FILE__, __LINE__, #a " ~ " #b)

#endif
