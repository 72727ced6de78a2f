#include "commands/changed_spec.h"

#include <google/protobuf/descriptor.h>
#include <google/protobuf/message.h>
#include <google/protobuf/text_format.h>

#include <algorithm>
#include <set>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "absl/time/time.h"

namespace drover::commands {
namespace {

using google::protobuf::FieldDescriptor;
using google::protobuf::Message;
using google::protobuf::Reflection;

// The defaults that the contract documents.
v1::StudySpec with_defaults(v1::StudySpec spec) {
  if (spec.replicates() == 0) spec.set_replicates(1);
  if (spec.late() == v1::LATE_REPORTS_UNSPECIFIED) spec.set_late(v1::LATE_REPORTS_ACCEPT);
  for (v1::CodeUse& use : *spec.mutable_codes()) {
    if (use.role() == v1::CODE_ROLE_UNSPECIFIED) use.set_role(v1::CODE_ROLE_FINE);
  }
  for (v1::Variable& variable : *spec.mutable_variables()) {
    if (variable.kind() == v1::VARIABLE_KIND_UNSPECIFIED) variable.set_kind(v1::VARIABLE_KIND_REAL);
    if (variable.scale() == v1::SCALE_UNSPECIFIED) variable.set_scale(v1::SCALE_LINEAR);
  }
  for (v1::Objective& objective : *spec.mutable_objectives()) {
    if (objective.sense() == v1::SENSE_UNSPECIFIED) objective.set_sense(v1::SENSE_MINIMISE);
    if (objective.across() == v1::ACROSS_UNSPECIFIED) objective.set_across(v1::ACROSS_MEAN);
  }
  for (v1::Constraint& constraint : *spec.mutable_constraints()) {
    if (constraint.across() == v1::ACROSS_UNSPECIFIED) constraint.set_across(v1::ACROSS_WORST);
  }
  if (spec.search().order() == v1::ORDER_UNSPECIFIED) spec.mutable_search()->set_order(v1::ORDER_COMPLETION);
  spec.mutable_budget();
  return spec;
}

// What the coordinator may fill when the author left it open. (A code's role, digest and cost are no keys of a file.)
bool may_be_filled(const FieldDescriptor& field) {
  static const std::set<std::string> kFilled = {
      "SearchSpec.method",     "SearchSpec.seed",      "SearchSpec.parallel", "SearchSpec.look_ahead",
      "SearchSpec.population", "SearchSpec.tolerance", "SearchSpec.share",    "Condition.weights",
      "Constraint.scale",      "Constraint.unit",      "Objective.unit",      "Variable.unit",
      "Condition.unit",        "Derived.unit",         "CodeUse.role",        "CodeUse.digest",
      "CodeUse.cost"};
  return kFilled.contains(absl::StrCat(field.containing_type()->name(), ".", field.name()));
}

// As the study file calls it.
std::string key_of(const Message& parent, const FieldDescriptor& field) {
  const std::string name = field.name();
  if (name == "codes") return "study.code";
  if (name == "baseline_choice") return "baseline";
  if (field.containing_type()->name() == "Constraint" && name == "name") return "output";
  if (field.containing_type()->name() == "Objective" && (name == "name" || name == "sense")) {
    const auto& objective = static_cast<const v1::Objective&>(parent);
    return objective.sense() == v1::SENSE_MAXIMISE ? "maximise" : "minimise";
  }
  if (field.containing_type()->name() == "CodeUse") return "";  // a text in the file, a message here
  if (field.containing_type()->name() != "StudySpec") return name;
  if (name == "variables" || name == "conditions" || name == "objectives" || name == "constraints") {
    return name.substr(0, name.size() - 1);
  }
  const bool table = name == "derived" || name == "search" || name == "budget";
  return table ? name : absl::StrCat("study.", name);
}

bool is_set(const Message& message, const FieldDescriptor& field) {
  const Reflection& reflection = *message.GetReflection();
  return field.is_repeated() ? reflection.FieldSize(message, &field) > 0 : reflection.HasField(message, &field);
}

// "maximise" for SENSE_MAXIMISE.
std::string word_of(const google::protobuf::EnumValueDescriptor& value) {
  std::size_t prefix = 1;  // the '_' behind the type's name, which has one more for each capital within
  for (const char c : value.type()->name()) prefix += absl::ascii_isupper(static_cast<unsigned char>(c)) ? 2 : 1;
  return absl::AsciiStrToLower(value.name().substr(std::min(prefix - 1, value.name().size())));
}

std::string one_text(const Message& message, const FieldDescriptor& field, int index) {
  const Reflection& reflection = *message.GetReflection();
  if (field.cpp_type() == FieldDescriptor::CPPTYPE_ENUM) return word_of(*reflection.GetEnum(message, &field));
  if (field.cpp_type() == FieldDescriptor::CPPTYPE_MESSAGE) {
    const auto& stamp = static_cast<const google::protobuf::Timestamp&>(reflection.GetMessage(message, &field));
    const absl::Time time = absl::FromUnixSeconds(stamp.seconds()) + absl::Nanoseconds(stamp.nanos());
    return absl::FormatTime("%Y-%m-%d%ET%H:%M:%E*SZ", time, absl::UTCTimeZone());
  }
  std::string value;
  google::protobuf::TextFormat::PrintFieldValueToString(message, &field, index, &value);
  return value;
}

// A single value or a list of values.
std::string text_of(const Message& message, const FieldDescriptor& field) {
  if (!field.is_repeated()) return one_text(message, field, -1);
  std::vector<std::string> values;
  for (int i = 0; i < message.GetReflection()->FieldSize(message, &field); ++i) {
    values.push_back(one_text(message, field, i));
  }
  return absl::StrJoin(values, ", ");
}

class Comparison {
 public:
  std::vector<ChangedField> take() { return std::move(changed_); }

  void compare(const std::string& path, const Message& written, const Message& stored) {
    const auto& type = *written.GetDescriptor();
    for (int i = 0; i < type.field_count(); ++i) {
      const FieldDescriptor& field = *type.field(i);
      const bool open = !is_set(written, field) && may_be_filled(field);
      if (open || (!is_set(written, field) && !is_set(stored, field))) continue;
      const std::string key = key_of(written, field);
      const std::string here = absl::StrCat(path, path.empty() || key.empty() ? "" : ".", key);
      const bool tables =
          field.cpp_type() == FieldDescriptor::CPPTYPE_MESSAGE && field.message_type()->name() != "Timestamp";
      tables ? compare_tables(here, field, written, stored) : compare_values(here, field, written, stored);
    }
  }

 private:
  void compare_tables(const std::string& path, const FieldDescriptor& field, const Message& written,
                      const Message& stored) {
    const Reflection& reflection = *written.GetReflection();
    if (!field.is_repeated()) {
      compare(path, reflection.GetMessage(written, &field), reflection.GetMessage(stored, &field));
      return;
    }
    const int now = reflection.FieldSize(written, &field), then = reflection.FieldSize(stored, &field);
    if (now != then) {
      changed_.push_back({path, absl::StrCat(now, " of them"), absl::StrCat(then, " of them")});
      return;
    }
    for (int i = 0; i < now; ++i) {
      compare(path == "study.code" ? path : absl::StrCat(path, "[", i, "]"),
              reflection.GetRepeatedMessage(written, &field, i), reflection.GetRepeatedMessage(stored, &field, i));
    }
  }

  void compare_values(const std::string& path, const FieldDescriptor& field, const Message& written,
                      const Message& stored) {
    const std::string now = is_set(written, field) ? text_of(written, field) : "";
    const std::string then = is_set(stored, field) ? text_of(stored, field) : "";
    if (now != then) changed_.push_back({path, now, then});
  }

  std::vector<ChangedField> changed_;
};

}  // namespace

std::vector<ChangedField> changed_fields(const v1::StudySpec& written, const v1::StudySpec& stored) {
  Comparison comparison;
  comparison.compare("", with_defaults(written), with_defaults(stored));
  return comparison.take();
}

}  // namespace drover::commands
