#include "netlists/lower.h"

#include <gtest/gtest.h>
