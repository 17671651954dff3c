#include "io/model_file.h"

#include <gtest/gtest.h>
