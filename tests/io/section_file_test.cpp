#include "io/section_file.h"

#include <gtest/gtest.h>
