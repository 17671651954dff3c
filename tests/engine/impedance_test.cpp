#include "engine/impedance.h"

#include <gtest/gtest.h>
