// drover-worker: runs simulations for a coordinator.
#include <CLI/CLI.hpp>
#include <string>

#include "codes_command.h"
#include "exit_code.h"
#include "link/log.h"
#include "link/stopping.h"
#include "serve_command.h"

namespace drover {
namespace {

struct Asked {
  ServeOptions serve;
  std::string codes;
  bool json = false;
};

CLI::App* add_serve(CLI::App& app, ServeOptions& asked) {
  CLI::App* const command = app.add_subcommand("serve", "Take runs from a coordinator until SIGTERM");
  command->description(
      "Takes runs from a coordinator until SIGTERM.\n\n"
      "  drover-worker serve --coordinator unix:/run/user/1000/drover/coordinator.sock --codes ~/codes --slots 4\n\n"
      "A coordinator that is away is waited for, for days if need be; results wait in the spool. The first SIGTERM\n"
      "stops what runs and hands it back, a second one ends this program at once.");
  command->add_option("--coordinator", asked.coordinator,
                      "unix:/path or host:port; default: this user's coordinator on this machine");
  command->add_option("--codes", asked.codes, "Folder of the code definitions")->required();
  command->add_option("--slots", asked.slots, "Simulations at once")->check(CLI::Range(1, 4096))->capture_default_str();
  command->add_option("--name", asked.name, "Of this worker, unique at its coordinator; default: the host's name");
  command->add_option("--spool", asked.spool,
                      "Folder for orders and results, on a local disk; default: ~/.local/state/drover/worker-<name>");
  command->add_option("--scratch", asked.scratch, "Folder where simulations run; default: scratch in the spool");
  command->add_option("--tag", asked.tags, "What this machine is good for; may be given several times");
  command->add_option("--end-with-pid", asked.owner, "End when this process does")->check(CLI::PositiveNumber);
  command->add_option("--runner", asked.runner, "The program drover-runner; default: the one beside this program");
  return command;
}

CLI::App* add_codes(CLI::App& app, Asked& asked) {
  CLI::App* const command = app.add_subcommand("codes", "Show the code definitions and what is wrong with them");
  command->description(
      "Shows the code definitions in a folder, and what is wrong with them.\n\n"
      "  drover-worker codes --codes ~/codes\n\n"
      "Ends with 2 if a definition is wrong, after file, line and column of every mistake.");
  command->add_option("--codes", asked.codes, "Folder of the code definitions")->required();
  command->add_flag("--json", asked.json, "For programs");
  return command;
}

int run(int argc, char** argv) {
  CLI::App app(
      "Runs simulations for a coordinator of Drover's.\n\n"
      "  drover-worker codes --codes ~/codes\n"
      "  drover-worker serve --codes ~/codes --slots 4\n");
  app.set_version_flag("--version", DROVER_VERSION);
  app.require_subcommand(1);
  Asked asked;
  CLI::App* const serving = add_serve(app, asked.serve);
  add_codes(app, asked);
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    return app.exit(error) == 0 ? kDone : kUsage;
  }
  return serving->parsed() ? serve(asked.serve) : show_codes(asked.codes, asked.json);
}

}  // namespace
}  // namespace drover

int main(int argc, char** argv) {
  drover::link::block_signals();
  drover::link::start_log("drover-worker");
  return drover::run(argc, argv);
}
