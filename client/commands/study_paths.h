// Where things lie that belong to a study file, unless somebody says otherwise.
#pragma once

#include <string>

namespace drover::commands {

std::string data_folder_of(const std::string& study_file);   // "a/penstock.toml" -> "a/penstock.drover"
std::string codes_folder_of(const std::string& study_file);  // "a/penstock.toml" -> "a/codes"
int usual_slots();                                           // processors of this machine, 1 or more

}  // namespace drover::commands
