#include "netlists/judge.h"
