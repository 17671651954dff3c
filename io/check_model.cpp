#include <iterator>

#include "io/check_report.h"
#include "netlists/lower.h"

namespace io {
namespace {

ModelFile validated(ModelFile model) {
  if (!model.is_read) return model;
  auto faults = netlists::validate(model.building);
  model.faults.insert(model.faults.end(), std::make_move_iterator(faults.begin()),
                      std::make_move_iterator(faults.end()));
  sort_by_place(model.faults);
  return model;
}

}  // namespace

ModelFile check_model(const std::string& path) { return validated(read_model(path)); }

ModelFile check_model_text(const std::string& text, const std::string& name) {
  return validated(read_model_text(text, name));
}

}  // namespace io
