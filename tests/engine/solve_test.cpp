#include "engine/solve.h"

#include <gtest/gtest.h>
