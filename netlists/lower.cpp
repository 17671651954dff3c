#include "netlists/lower.h"
