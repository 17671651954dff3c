#include <gtest/gtest.h>

#include "netlists/lower.h"
