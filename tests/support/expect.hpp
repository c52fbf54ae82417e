// Comparison to a relative tolerance, as published cases state it.
#pragma once

#include <gtest/gtest.h>

#include <cmath>

// |value - expected| <= relative |expected|
#define EXPECT_RELATIVE(value, expected, relative) EXPECT_NEAR(value, expected, (relative) * std::abs(expected))
// expected / factor <= value <= expected * factor
#define EXPECT_FACTOR(value, expected, factor)       \
  do {                                               \
    EXPECT_GE(value, (expected) / (factor));         \
    EXPECT_LE(value, (expected) * (factor));         \
  } while (false)
