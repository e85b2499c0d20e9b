/**
 * Sends one question at a time; of those asked meanwhile only the newest is kept. A drag asks far
 * more often than a fit answers, and only where the hand is now matters.
 *
 * @param stale  "drop" answers to a question that a newer one has overtaken, or "show" them on the way
 */
export function newestWins<Question, Answer>(
  send: (question: Question) => Promise<Answer>,
  answered: (answer: Answer, question: Question) => void,
  failed: (error: unknown, question: Question) => void,
  stale: "drop" | "show",
): (question: Question) => void {
  let underWay = false;
  let waiting: { question: Question } | null = null;

  async function run(question: Question) {
    underWay = true;
    let settle: () => void;
    try {
      const answer = await send(question);
      settle = () => answered(answer, question);
    } catch (error) {
      settle = () => failed(error, question);
    }
    underWay = false;
    const next = waiting;
    waiting = null;
    if (next === null || stale === "show") settle();
    if (next !== null) void run(next.question);
  }

  return (question) => {
    if (underWay) waiting = { question };
    else void run(question);
  };
}
