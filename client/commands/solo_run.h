// One study searched by this machine alone, from wherever it stands to its end.
#pragma once

#include <memory>
#include <string>

#include "absl/status/statusor.h"
#include "commands/command.h"
#include "commands/private_site.h"
#include "screen/live_line.h"
#include "studyfile/study_file.h"

namespace drover::commands {

struct SoloOptions {
  std::string file;   // of the study
  std::string codes;  // folder
  std::string data;   // folder
  int slots = 1;
  std::string command;  // what a person gives again to carry on
};

class SoloRun {
 public:
  SoloRun(Context& context, const SoloOptions& options, const studyfile::StudyFile& file);

  // Until the study is over or Ctrl-C. The daemons have ended when it returns.
  Exit run();

 private:
  absl::StatusOr<Exit> search(PrivateSite& site, const DataFolder& folder);
  // The study as it stands at the start: started, or found again and woken. kWrongInput in `exit`, after a message,
  // when the file does not fit.
  absl::StatusOr<v1::Study> begin(PrivateSite& site, Exit* exit);
  absl::StatusOr<v1::Study> start_new(PrivateSite& site, Exit* exit);
  absl::StatusOr<v1::Study> carry_on(PrivateSite& site, v1::Study study, Exit* exit);
  absl::StatusOr<v1::Study> follow(PrivateSite& site, v1::Study study);
  Exit interrupted(const DataFolder& folder);
  Exit gone(const absl::Status& status);

  Context& context_;
  const SoloOptions& options_;
  const studyfile::StudyFile& file_;
  Interruption& interruption_;
  Output& output_;
};

}  // namespace drover::commands
