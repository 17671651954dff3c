#include "io/writers.h"

#include <gtest/gtest.h>
