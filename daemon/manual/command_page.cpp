#include "daemon/manual/command_page.hpp"

#include "daemon/manual/roff.hpp"

namespace agreed::manual {
namespace {

constexpr std::string_view kIndent = "  ";

/// The end of a --help: prose in paragraphs, indented lines as they are typed.
std::string help_text(std::string_view text) {
  std::string page, paragraph, lines;
  const auto flush = [&] {
    if (!paragraph.empty()) page += ".PP\n" + prose(paragraph);
    if (!lines.empty()) page += typed(lines);
    paragraph.clear();
    lines.clear();
  };
  while (!text.empty()) {
    const std::size_t end = text.find('\n');
    const std::string_view line = text.substr(0, end);
    const bool is_typed = line.starts_with(kIndent);
    if (line.empty() || (is_typed ? lines.empty() : !lines.empty()) || line.starts_with("Example")) flush();
    if (is_typed)
      lines += std::string(line.substr(kIndent.size())) + '\n';
    else
      paragraph += std::string(line) + '\n';
    text = end == std::string_view::npos ? std::string_view{} : text.substr(end + 1);
  }
  flush();
  return page;
}

std::string shown_name(const ArgumentHelp& argument) {
  const std::string name = bold(argument.name == "--help" ? "-h, --help" : argument.name);
  return argument.value.empty() ? name : name + ' ' + bold(argument.value);
}

/// "agreed check [OPTIONS] CONFIG"
std::string synopsis(const CommandHelp& command) {
  std::string line = bold("agreed " + command.name);
  for (const ArgumentHelp& argument : command.arguments) {
    if (argument.name == "--help" || (argument.is_option && !argument.is_required)) continue;
    line += ' ' + (argument.is_required ? shown_name(argument) : '[' + shown_name(argument) + ']');
  }
  return line + " [options]\n";
}

std::string arguments_text(const CommandHelp& command) {
  std::string page;
  for (const ArgumentHelp& argument : command.arguments)
    page += ".TP\n" + shown_name(argument) + '\n' +
            prose(argument.what + (argument.is_required ? " (required)" : ""));
  return page;
}

/// A sign, a file, a variable and what it means.
std::string item(std::string_view name, std::string_view meaning) {
  return ".TP\n" + bold(name) + '\n' + prose(meaning);
}

std::string exit_status() {
  return section("EXIT STATUS") + item("0", "done, or the answer is yes") +
         item("1", "done, and the answer is no") + item("2", "wrong use, or a wrong configuration") +
         item("3",
              "could not do it: the port is in use, the state folder is taken, the service cannot be "
              "reached, ...");
}

std::string signals() {
  return section("SIGNALS") +
         item("SIGTERM, SIGINT",
              "end agreed run within two seconds. What was taken in is in the journal; messages that wait go "
              "out after the next start. SIGKILL loses nothing either.") +
         item("SIGHUP",
              "agreed run reads its configuration again. One that cannot be used changes nothing: the log "
              "says "
              "every problem, and the one in force goes on.");
}

std::string environment() {
  return section("ENVIRONMENT") +
         item("AGREED_TOKEN", "the token for resend and status, where --token-file gives none") +
         item("NO_COLOR", "if set and not empty, status shows no colour") +
         item("TERM", "dumb: status shows no colour") +
         item("JOURNAL_STREAM", "set by systemd: log lines begin with their priority, without a time") +
         item("WATCHDOG_USEC, WATCHDOG_PID", "set by systemd: run gives it a sign of life while it gets on") +
         item("NOTIFY_SOCKET",
              "set by systemd: run tells it when it is ready and when it ends (sd_notify(3))") +
         ".PP\n" + prose("Further ones are those that secret_env in the configuration names.");
}

std::string files() {
  return section("FILES") +
         item("/etc/agreed/agreed.yaml", "the configuration in the examples here; see agreed.yaml(5)") +
         item("STATE/journal.sqlite",
              "the journal: every result, alert and message; STATE is state in the configuration") +
         item("INBOX/done, INBOX/rejected",
              "where dropped files go once they are in the journal, or cannot be used; beside the latter "
              "NAME.reason.txt "
              "says why") +
         item("access.tokens_file of the configuration",
              "hashes of tokens, one line each: role, name, SHA-256");
}

}  // namespace

std::string command_page(const std::vector<CommandHelp>& commands, std::string_view date,
                         std::string_view version) {
  const CommandHelp& program = commands.front();
  std::string page = title("agreed", 1, date, "agreed " + std::string(version));
  page += section("NAME") + "agreed \\- keeps two production analyzers true to each other\n";
  page += section("SYNOPSIS");
  for (std::size_t i = 1; i < commands.size(); ++i) page += (i > 1 ? ".br\n" : "") + synopsis(commands[i]);
  page += section("DESCRIPTION") + prose(program.what) + ".PP\n" +
          prose(
              "Its results are statistical evidence and not a release decision. Where a wrong result can "
              "hurt someone, the "
              "local regulation, the accredited procedure and the licensed or responsible person decide. "
              "agreed is not a "
              "medical device and no safety interlock.");
  page += section("OPTIONS") + arguments_text(program);
  page += section("COMMANDS");
  for (std::size_t i = 1; i < commands.size(); ++i)
    page += ".SS " + commands[i].name + '\n' + prose(commands[i].what) + arguments_text(commands[i]) +
            help_text(commands[i].more);
  page += exit_status() + signals() + environment() + files();
  page += section("EXAMPLES") + prose("A complete example in a new folder, looked over and run:") +
          help_text(program.more);
  return page + section("SEE ALSO") + "\\fBagreed.yaml\\fP(5)\n";
}

}  // namespace agreed::manual
