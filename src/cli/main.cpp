#include <csignal>
#include <cstdio>
#include <exception>
#include <fstream>
#include <span>
#include <stop_token>
#include <string>
#include <thread>

#ifdef __GLIBC__
#include <malloc.h>
#endif

#include "stillmass/base/version.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"
#include "cli/help.hpp"

namespace {

using namespace stillmass;

// Turns the first SIGINT or SIGTERM into a stop request, so that the work ends tidily; the second one ends the program.
// Signals are taken by this thread alone, so no handler and no flag is needed.
class SignalWatch {
 public:
  explicit SignalWatch(std::stop_source& stop) {
    sigset_t set = watched();
    pthread_sigmask(SIG_BLOCK, &set, nullptr);
    watcher_ = std::jthread([&stop](const std::stop_token& over) {
      const sigset_t signals = watched();
      for (int signal = 0; sigwait(&signals, &signal) == 0;) {
        if (over.stop_requested()) return;
        if (signal == wake) continue;
        if (stop.stop_requested()) std::_Exit(cli::stopped);
        stop.request_stop();
      }
    });
  }
  ~SignalWatch() {
    watcher_.request_stop();
    pthread_kill(watcher_.native_handle(), wake);  // so that the program need not wait for the thread to look
  }
  SignalWatch(const SignalWatch&) = delete;
  SignalWatch& operator=(const SignalWatch&) = delete;

 private:
  static constexpr int wake = SIGUSR1;

  static sigset_t watched() {
    sigset_t set;
    sigemptyset(&set);
    for (const int signal : {SIGINT, SIGTERM, wake}) sigaddset(&set, signal);
    return set;
  }
  std::jthread watcher_;
};

int run(cli::Session& session) {
  const std::string& command = session.arguments().command;
  if (command == "check") return cli::run_check(session);
  if (command == "spectrum") return cli::run_spectrum(session);
  if (command == "runup") return cli::run_runup(session);
  if (command == "bump") return cli::run_bump(session);
  if (command == "absorber") return cli::run_absorber(session);
  if (command == "survey") return cli::run_survey(session);
  if (command == "simulate") return cli::run_simulate(session);
  return cli::run_manual(session);
}

int guarded(std::span<const char* const> words) {
  std::stop_source stop;
  const SignalWatch watch(stop);
  std::signal(SIGPIPE, SIG_IGN);
  try {
    cli::Arguments arguments = cli::parse(words);
    if (arguments.version) {
      std::printf("stillmass %s\n", std::string(base::version()).c_str());
      return cli::done;
    }
    if (arguments.help) {
      std::fputs(cli::help_text(arguments.command).c_str(), stdout);
      return cli::done;
    }
    cli::Session session(std::move(arguments), stop.get_token());
    return run(session);
  } catch (const base::Stopped&) {
    std::fputs("\nstillmass: stopped; nothing was written\n", stderr);
    return cli::stopped;
  } catch (const base::Error& error) {
    std::fprintf(stderr, "stillmass: %s\n", error.what());
    return cli::exit_code(error.kind);
  } catch (const std::bad_alloc&) {
    std::fputs("stillmass: out of memory\n", stderr);
    return cli::own_fault;
  } catch (const std::exception& error) {
    std::fprintf(stderr, "stillmass: a fault of the program: %s\n", error.what());
    return cli::own_fault;
  }
}

// Passes over a recording take and give back the same large buffers, range after range: memory that went back to the
// system each time would have to be cleared by it each time.
void keep_freed_memory() {
#ifdef __GLIBC__
  constexpr int bytes = 64 * 1024 * 1024;
  ::mallopt(M_MMAP_THRESHOLD, bytes / 2);
  ::mallopt(M_TRIM_THRESHOLD, bytes);
  ::mallopt(M_ARENA_MAX, 1);  // what one thread gave back the other can take
#endif
}

}  // namespace

int main(int argc, char** argv) {
  keep_freed_memory();
  return guarded({argv, static_cast<std::size_t>(argc)});
}
