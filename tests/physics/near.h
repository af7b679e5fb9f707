/* Relative comparison that says both numbers when it fails. */
#ifndef TESTS_PHYSICS_NEAR_H
#define TESTS_PHYSICS_NEAR_H

#include <math.h>

/* |got - want| <= tolerance * |scale|; not a number never is. */
#define assert_within(got, want, scale, tolerance)                                                 \
    do {                                                                                           \
        double got_ = (got), want_ = (want);                                                       \
        if (!(fabs(got_ - want_) <= (tolerance)*fabs(scale)))                                      \
            fail_msg("%s: got %.12g, want %.12g (off by %.3g)", #got, got_, want_, got_ - want_);  \
    } while (0)

#define assert_near(got, want, tolerance) assert_within(got, want, want, tolerance)

#endif
