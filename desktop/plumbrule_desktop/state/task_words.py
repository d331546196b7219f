"""What is said of a task: its state in words, and what to do where it did not finish."""

from plumbrule_core.documents.run_state import Progressing, TaskState

WORDS: dict[Progressing, str] = {
    "waiting": "waiting",
    "running": "running",
    "done": "done",
    "reused": "already known",
    "failed": "failed",
    "died": "died",
    "stopped": "stopped",
}


def state_words(task: TaskState) -> str:
    """`running: iteration 7`, `already known`, `failed`."""
    words = WORDS[task.state]
    if task.state == "running" and task.what:
        return f"{words}: {task.what}"
    return words


def trouble_words(task: TaskState) -> str:
    """Why a task did not finish and what to do about it; empty for every other task."""
    match task.state:
        case "stopped":
            return f"You stopped this task. {_carry_on(task)}"
        case "died":
            return f"The worker process ended without a word: {_sentence(task.reason)} {_carry_on(task)}"
        case "failed":
            return (
                f"This task failed: {_sentence(task.reason)} Change the recipe or the molecule on the Build "
                "page, or press Run to try again."
            )
        case _:
            return ""


def _carry_on(task: TaskState) -> str:
    if task.trace:
        return f"Press Run to carry on; it continues from iteration {task.trace[-1][0]}."
    return "Press Run to carry on; this task begins again, everything that was finished stays."


def _sentence(reason: str) -> str:
    reason = reason.strip() or "no reason was given"
    return reason if reason.endswith((".", "!", "?")) else f"{reason}."
