#include "netlists/fault.h"

#include <gtest/gtest.h>
