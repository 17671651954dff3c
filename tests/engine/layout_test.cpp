#include "engine/layout.h"

#include <gtest/gtest.h>
