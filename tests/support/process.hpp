// Programs as processes of their own, started and ended by a test.
#pragma once

#include <fcntl.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <chrono>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <mutex>
#include <regex>
#include <stdexcept>
#include <string>
#include <thread>
#include <utility>
#include <vector>

namespace holdfast::tests {

/// A running program; ended with SIGKILL if it still runs when the object goes. Output and errors go to
/// `log`.
class Process {
 public:
  Process(std::vector<std::string> command, std::filesystem::path log) : log_(std::move(log)) {
    std::vector<char*> arguments;
    for (std::string& word : command) arguments.push_back(word.data());
    arguments.push_back(nullptr);
    // Only calls that are safe between fork and exec in a program with threads.
    const int out = open(log_.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0600);
    child_ = fork();
    if (child_ == 0) {
      dup2(out, STDOUT_FILENO);
      dup2(out, STDERR_FILENO);
      execv(arguments[0], arguments.data());
      _exit(127);
    }
    close(out);
    if (child_ < 0) throw std::runtime_error("fork");
  }
  Process(const Process&) = delete;
  Process& operator=(const Process&) = delete;
  ~Process() {
    if (child_ > 0) {
      signal(SIGKILL);
      wait();
    }
  }

  /// Nothing happens if the program has ended and wait() has seen it. Safe beside wait().
  void signal(int which) const {
    const std::lock_guard lock(mutex_);
    if (child_ > 0) kill(child_, which);  // kill(-1, ...) would mean everybody
  }

  /// Waits for the end: exit status, or minus the signal that ended it.
  int wait() {
    // First without reaping, so that the number is nobody else's while signal() may still use it.
    siginfo_t info{};
    waitid(P_PID, static_cast<id_t>(child_), &info, WEXITED | WNOWAIT);
    const std::lock_guard lock(mutex_);
    int status = 0;
    waitpid(std::exchange(child_, -1), &status, 0);
    return WIFEXITED(status) ? WEXITSTATUS(status) : -WTERMSIG(status);
  }

  std::string output() const {
    std::ifstream in(log_);
    return {std::istreambuf_iterator<char>(in), {}};
  }

  /// Waits until the output matches; the first group of the match.
  std::string awaitOutput(const std::string& pattern) const {
    const std::regex regex(pattern);
    for (int i = 0; i < 3000; ++i) {
      const std::string text = output();
      std::smatch match;
      if (std::regex_search(text, match, regex)) return match[1];
      std::this_thread::sleep_for(std::chrono::milliseconds(10));
    }
    throw std::runtime_error("no \"" + pattern + "\" in: " + output());
  }

 private:
  std::filesystem::path log_;
  mutable std::mutex mutex_;
  pid_t child_ = -1;
};

inline std::string program(const std::string& name) {
  return std::string(HOLDFAST_BIN_DIR) + "/" + name;
}

/// `holdfast serve` on any free port of loopback.
struct ServeProcess {
  explicit ServeProcess(const std::filesystem::path& store, const std::filesystem::path& log,
                        const std::string& listen = "127.0.0.1:0")
      : process({program("holdfast"), "serve", "--listen", listen, "--store", store.string()}, log),
        address("127.0.0.1:" + process.awaitOutput(R"(serves .* on .*:(\d+)\n)")) {}
  Process process;
  std::string address;
};

}  // namespace holdfast::tests
