#include "engine/capacitance.h"

#include <gtest/gtest.h>
