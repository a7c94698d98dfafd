#include <cstdio>
#include <exception>
#include <string>
#include <vector>

#include "daemon/cli/check.hpp"
#include "daemon/cli/command_line.hpp"
#include "daemon/cli/example.hpp"
#include "daemon/cli/journal_commands.hpp"
#include "daemon/cli/plan.hpp"
#include "daemon/cli/replay.hpp"
#include "daemon/cli/report.hpp"
#include "daemon/cli/resend.hpp"
#include "daemon/cli/run.hpp"
#include "daemon/cli/send_test.hpp"
#include "daemon/cli/status.hpp"
#include "daemon/cli/token.hpp"
#include "daemon/exit_codes.hpp"

namespace {

struct Doer {
  int operator()(const agreed::RunCommand& command) const { return agreed::run_service(command.config); }
  int operator()(const agreed::CheckCommand& command) const { return agreed::check_configuration(command); }
  int operator()(const agreed::ExampleCommand& command) const {
    return agreed::write_example(command.folder);
  }
  int operator()(const agreed::VerifyCommand& command) const { return agreed::verify_command(command); }
  int operator()(const agreed::BackupCommand& command) const { return agreed::backup_command(command); }
  int operator()(const agreed::RestoreCommand& command) const { return agreed::restore_command(command); }
  int operator()(const agreed::ReportCommand& command) const { return agreed::report_command(command); }
  int operator()(const agreed::TokenCommand& command) const { return agreed::token_command(command); }
  int operator()(const agreed::SendTestCommand& command) const { return agreed::send_test_command(command); }
  int operator()(const agreed::ResendCommand& command) const { return agreed::resend_command(command); }
  int operator()(const agreed::StatusCommand& command) const { return agreed::status_command(command); }
  int operator()(const agreed::ReplayCommand& command) const { return agreed::replay_command(command); }
  int operator()(const agreed::PlanCommand& command) const { return agreed::plan_command(command); }
  int operator()(const agreed::Say& say) const {
    std::fputs(say.text.c_str(), say.code == agreed::kDone ? stdout : stderr);
    return say.code;
  }
};

}  // namespace

int main(int argc, char** argv) {
  try {
    const std::vector<std::string> arguments(argv + 1, argv + argc);
    return std::visit(Doer{}, agreed::parse_command_line(arguments));
  } catch (const std::exception& error) {
    std::fprintf(stderr, "agreed: %s\n", error.what());
    return agreed::kCouldNotDoIt;
  }
}
