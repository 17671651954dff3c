#include "engine/solve.h"
