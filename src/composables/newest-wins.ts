/**
 * Runs one request at a time; of those that come meanwhile only the newest runs next, and only the newest answer is
 * handed on. For work that follows each keystroke.
 *
 * @example
 * const fit = newestWins(question => worker.answer(question), answer => { shown.value = answer })
 */
export function newestWins<Question, Answer>(
  work: (question: Question) => Promise<Answer>,
  take: (answer: Answer, question: Question) => void,
  fail: (error: unknown) => void,
): (question: Question) => void {
  let running = false
  let next: { readonly question: Question } | null = null

  async function run(question: Question): Promise<void> {
    running = true
    try {
      const answer = await work(question)
      // A newer question is waiting: this answer is already out of date.
      if (next === null) take(answer, question)
    } catch (error) {
      if (next === null) fail(error)
    } finally {
      running = false
      const waiting = next
      next = null
      if (waiting !== null) void run(waiting.question)
    }
  }

  return question => {
    if (running) next = { question }
    else void run(question)
  }
}
