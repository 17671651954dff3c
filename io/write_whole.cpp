#include "io/writers.h"
