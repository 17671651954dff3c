// What io/README.md shows its readers, for the tests that hold it true.
#pragma once

#include <fstream>
#include <sstream>
#include <string>

namespace io {

/// The first YAML block of a section of io/README.md.
inline std::string readme_example(const std::string& section) {
  std::ifstream file(IDLEWIRE_SOURCE_DIR "/io/README.md");
  std::stringstream text;
  text << file.rdbuf();
  const std::string all = text.str();
  const auto begin = all.find("```yaml\n", all.find("## " + section)) + 8;
  return all.substr(begin, all.find("```", begin) - begin);
}

}  // namespace io
