#include "engine/attribution.h"

#include <gtest/gtest.h>
