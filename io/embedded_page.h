// The page's style sheet and script as the build put them into the program.
#pragma once

#include <string_view>

namespace io {

std::string_view page_style();   // io/page/page.css
std::string_view page_script();  // io/page/page.js

}  // namespace io
