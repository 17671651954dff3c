#include "io/quantity.h"

#include <gtest/gtest.h>
