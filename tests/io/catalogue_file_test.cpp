#include "io/catalogue_file.h"

#include <gtest/gtest.h>
