#include "netlists/judge.h"

#include <gtest/gtest.h>
