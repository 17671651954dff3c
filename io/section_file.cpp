#include "io/section_file.h"
