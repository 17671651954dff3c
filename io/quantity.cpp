#include "io/quantity.h"
