#include "engine/network.h"

#include <gtest/gtest.h>
