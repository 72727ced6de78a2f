#include "code/catalogue.h"

#include <algorithm>
#include <filesystem>
#include <utility>

#include "absl/strings/str_cat.h"

namespace drover::code {

namespace fs = std::filesystem;

const Definition* Catalogue::find(const std::string& name) const {
  const auto at = std::find_if(codes.begin(), codes.end(), [&](const Definition& code) { return code.name == name; });
  return at == codes.end() ? nullptr : &*at;
}

absl::StatusOr<Catalogue> read_catalogue(const std::string& folder) {
  std::error_code error;
  std::vector<std::string> folders;
  for (const fs::directory_entry& entry : fs::directory_iterator(folder, error)) {
    std::error_code ignored;
    if (fs::exists(entry.path() / "code.toml", ignored)) folders.push_back(entry.path().string());
  }
  if (error)
    return absl::NotFoundError(absl::StrCat("the folder of codes ", folder, " cannot be read: ", error.message()));
  std::sort(folders.begin(), folders.end());
  Catalogue catalogue;
  for (const std::string& one : folders) {
    absl::StatusOr<Definition> definition = read_definition(one);
    if (!definition.ok()) {
      catalogue.problems.emplace_back(definition.status().message());
    } else if (const Definition* const other = catalogue.find(definition->name)) {
      catalogue.problems.push_back(absl::StrCat(definition->folder, "/code.toml: there is a code ", definition->name,
                                                " in ", other->folder, " already; give this one another name"));
    } else {
      catalogue.codes.push_back(*std::move(definition));
    }
  }
  std::sort(catalogue.codes.begin(), catalogue.codes.end(),
            [](const Definition& a, const Definition& b) { return a.name < b.name; });
  return catalogue;
}

}  // namespace drover::code
