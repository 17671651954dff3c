// What standard output is, and what day it is.
#pragma once

#include <string>

namespace io {

/// Columns to write for: those of the terminal, between 60 and 100; 100 where there is none.
int output_width();

/// True on a terminal that is not `dumb`, unless NO_COLOR is set to anything but "".
bool output_colour();

/// True where messages go to a terminal that can take a line back.
bool messages_on_terminal();

/// Columns that a message may take on one line.
int message_width();

/// The day as "2024-05-17", local; that of SOURCE_DATE_EPOCH, in UTC, where it is set.
std::string today();

}  // namespace io
