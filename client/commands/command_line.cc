// Reads the command line and calls the command. The one file that catches what CLI11 throws.
#include <CLI/CLI.hpp>
#include <map>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "commands/command.h"
#include "link/text.h"
#include "studyfile/nearest.h"

namespace drover::commands {
namespace {

constexpr char kAbout[] =
    "Finds the best design that a slow simulation code can show, on the machines there are.\n"
    "\n"
    "Examples:\n"
    "  drover solo penstock.toml      search on this machine alone, or carry on\n"
    "  drover start penstock.toml     hand a study to the coordinator\n"
    "  drover show penstock           how far is it, and what is the best so far?\n";

constexpr char kEnd[] =
    "Exit codes: 0 done; 1 the answer is no, or the study failed; 2 wrong usage or input; 3 the coordinator cannot be\n"
    "reached. Data goes to standard output, messages to standard error.\n"
    "Every command has a help of its own: drover COMMAND --help\n";

std::vector<Command> all_commands() {
  return {check_command(), solo_command(),  start_command(), list_command(),   show_command(), best_command(),
          runs_command(),  table_command(), pause_command(), resume_command(), stop_command()};
}

struct Common {
  std::string coordinator;
  bool json = false;
};

std::string help_of(const Command& command, const CLI::App& app) {
  std::string text = absl::StrCat(command.summary, "\n\nExamples:\n");
  for (const std::string& example : command.examples) absl::StrAppend(&text, "  ", example, "\n");
  if (!command.details.empty()) absl::StrAppend(&text, "\n", command.details, "\n");
  // CLI11 begins with the description, which stands above already.
  constexpr char kUsage[] = "Usage: ";
  const std::string options = app.help();
  const std::size_t usage = options.find(kUsage);
  if (usage == std::string::npos) return absl::StrCat(text, "\n", options);
  return absl::StrCat(text, "\n", kUsage, "drover ", options.substr(usage + sizeof kUsage - 1));
}

// "unknown command "shwo"; did you mean "show"?" for what is left over.
std::string unknown(const std::string& kind, const std::string& word, const std::vector<std::string>& known) {
  const std::string near = studyfile::nearest(word, known);
  std::string text = absl::StrCat("there is no ", kind, " ", word);
  if (!near.empty()) return absl::StrCat(text, "; did you mean ", near, "?");
  return absl::StrCat(text, "; there are ", absl::StrJoin(known, ", "));
}

std::vector<std::string> options_of(const CLI::App& app) {
  std::vector<std::string> names;
  for (const CLI::Option* option : app.get_options()) {
    for (const std::string& name : option->get_lnames()) names.push_back("--" + name);
  }
  return names;
}

class Line {
 public:
  explicit Line(const Surroundings& surroundings) : surroundings_(surroundings), commands_(all_commands()) {
    app_.set_help_flag("-h,--help", "print this help");
    app_.set_version_flag("--version", surroundings.version, "print the version");
    app_.require_subcommand(0, 1);
    for (const Command& command : commands_) add(command);
  }

  Exit run(const std::vector<std::string>& arguments) {
    try {
      std::vector<std::string> reversed(arguments.rbegin(), arguments.rend());
      app_.parse(reversed);
    } catch (const CLI::CallForVersion&) {
      return print(absl::StrCat("drover ", surroundings_.version, "\n"));
    } catch (const CLI::CallForHelp&) {
      return print(help());
    } catch (const CLI::ParseError& error) {
      return wrong_usage(arguments, error.what());
    }
    const Command* const command = chosen();
    if (command == nullptr) return no_command();
    return call(*command);
  }

 private:
  void add(const Command& command) {
    CLI::App* const sub = app_.add_subcommand(command.name, command.summary);
    if (command.asks_coordinator) {
      sub->add_option("--coordinator", common_.coordinator,
                      "where the coordinator listens: unix:/path or host:port [$DROVER_COORDINATOR]");
    }
    sub->add_flag("--json", common_.json, "print JSON: one document, or one a line");
    command.options(*sub);
    subs_[command.name] = sub;
  }

  const Command* chosen() const {
    for (const Command& command : commands_) {
      if (subs_.at(command.name)->parsed()) return &command;
    }
    return nullptr;
  }

  std::string help() const {
    const Command* const command = chosen();
    if (command != nullptr) return help_of(*command, *subs_.at(command->name));
    std::string text = absl::StrCat(kAbout, "\nCommands:\n");
    for (const Command& each : commands_) {
      absl::StrAppend(&text, "  ", each.name, std::string(10 - each.name.size(), ' '), each.summary, "\n");
    }
    return absl::StrCat(text, "\n", kEnd);
  }

  Exit print(const std::string& text) {
    Output output(surroundings_.data, surroundings_.messages, false);
    output.data(text);
    return output.finish(Exit::kDone);
  }

  Exit no_command() {
    Output(surroundings_.data, surroundings_.messages, false).say(help());
    return Exit::kWrongInput;
  }

  // CLI11 says of a misspelt word only that something else was missing, or that it was not expected.
  std::string explained(const std::vector<std::string>& arguments, const std::string& what) const {
    const Command* const command = chosen();
    if (command == nullptr) {
      std::vector<std::string> names;
      for (const Command& each : commands_) names.push_back(each.name);
      for (const std::string& word : arguments) {
        if (!word.starts_with("-")) return unknown("command", word, names);
      }
      return what;
    }
    const std::vector<std::string> known = options_of(*subs_.at(command->name));
    for (const std::string& word : arguments) {
      if (word == "--") break;
      const std::string name = word.substr(0, word.find('='));
      const bool is_known = std::find(known.begin(), known.end(), name) != known.end();
      if (name.starts_with("--") && !is_known) return unknown("option", name, known);
    }
    return what;
  }

  Exit wrong_usage(const std::vector<std::string>& arguments, const std::string& what) {
    const Command* const command = chosen();
    const std::string help_line =
        command == nullptr ? "drover --help" : absl::StrCat("drover ", command->name, " --help");
    Output output(surroundings_.data, surroundings_.messages, false);
    output.say(absl::StrCat(output.message_screen().bad("drover:"), " ", link::printable(explained(arguments, what)),
                            "; see: ", help_line));
    return Exit::kWrongInput;
  }

  Exit call(const Command& command) {
    Output output(surroundings_.data, surroundings_.messages, common_.json);
    Context context{surroundings_, output,
                    common_.coordinator.empty() ? surroundings_.coordinator : common_.coordinator};
    return output.finish(command.run(context));
  }

  const Surroundings& surroundings_;
  std::vector<Command> commands_;
  Common common_;
  CLI::App app_{"", "drover"};
  std::map<std::string, CLI::App*> subs_;
};

}  // namespace

absl::StatusOr<std::unique_ptr<Coordinator>> Context::connect() const {
  constexpr absl::Duration kPatience = absl::Seconds(3);
  const auto once = [said = false, this]() mutable {
    if (!said) output.say(absl::StrCat("drover: no answer yet from ", address, "; trying again for some seconds"));
    said = true;
    return absl::OkStatus();
  };
  return Coordinator::at(address, surroundings.clock, surroundings.interruption, kPatience, once);
}

int run(const std::vector<std::string>& arguments, const Surroundings& surroundings) {
  return static_cast<int>(Line(surroundings).run(arguments));
}

}  // namespace drover::commands
