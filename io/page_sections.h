// Drawings of cross-sections for the page: each distinct one once, used by many sheets.
#pragma once

#include <map>
#include <string>
#include <vector>

#include "netlists/building.h"
#include "netlists/sections.h"
#include "netlists/wiring.h"

namespace io {

/// Draws the first layout of each run that a seed draws. The building must outlive it.
class SectionGallery {
 public:
  SectionGallery(const netlists::Building& building, unsigned seed);

  /// A figure of one run with a conductor marked and its aggressors numbered from 1, in their order; the
  /// names are those of findings. "" for a run that is not there or cannot be laid out.
  std::string figure(const std::string& run, const std::string& conductor,
                     const std::vector<std::string>& aggressors);

  /// The drawings that the figures so far refer to, as symbols of one hidden image.
  std::string symbols() const;

  /// Bytes that symbols() takes, about.
  std::size_t size() const { return size_; }

 private:
  struct Drawing {
    std::string symbol;  // "s1"; "" where the run could not be laid out
    double left = 0, top = 0, width = 0, height = 0;
    netlists::RunSection section;
  };
  const Drawing& drawing(std::size_t run);

  const netlists::Building& building_;
  netlists::Wiring wiring_;
  netlists::SectionLibrary library_;
  std::map<std::size_t, Drawing> drawings_;
  std::map<std::string, std::string> symbols_;  // content -> id
  std::size_t size_ = 0;
};

}  // namespace io
