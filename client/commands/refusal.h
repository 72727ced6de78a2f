// A study file that was refused, answered at the places that are meant.
#pragma once

#include <vector>

#include "absl/status/status.h"
#include "commands/output.h"
#include "drover/v1/problem.pb.h"
#include "studyfile/study_file.h"

namespace drover::commands {

// Problems of the coordinator at their places in the file, by place.
std::vector<studyfile::Complaint> located(const google::protobuf::RepeatedPtrField<v1::Problem>& problems,
                                          const studyfile::StudyFile& file);

// The error of a call that sent `file`: its problems as complaints, a taken name at the name, anything else as it is.
Exit refuse(Output& output, const absl::Status& status, const studyfile::StudyFile& file);

// The study file could not even be read: wrong input, whatever the reason.
Exit unreadable(Output& output, const absl::Status& status);

}  // namespace drover::commands
