#include "io/catalogue_file.h"
