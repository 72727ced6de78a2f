#include "commands/refusal.h"

#include "absl/strings/str_cat.h"
#include "link/status.h"

namespace drover::commands {

std::vector<studyfile::Complaint> located(const google::protobuf::RepeatedPtrField<v1::Problem>& problems,
                                          const studyfile::StudyFile& file) {
  std::vector<studyfile::Complaint> complaints;
  for (const v1::Problem& problem : problems) complaints.push_back(file.places.locate(problem, file.name));
  studyfile::sort_by_place(complaints);
  return complaints;
}

Exit refuse(Output& output, const absl::Status& status, const studyfile::StudyFile& file) {
  const auto detail = link::error_detail(status);
  if (detail.has_value() && detail->problems_size() > 0) return output.complain(located(detail->problems(), file));
  if (!absl::IsAlreadyExists(status)) return output.fail(status);
  const std::string advice = absl::StrCat("write another name, or see what there is: drover show ", file.spec.name());
  return output.complain({{.file = file.name,
                           .place = file.places.find("study.name"),
                           .field = "study.name",
                           .text = std::string(status.message()),
                           .advice = advice,
                           .nearest = ""}});
}

Exit unreadable(Output& output, const absl::Status& status) {
  output.fail(status);
  return Exit::kWrongInput;
}

}  // namespace drover::commands
