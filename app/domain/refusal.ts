/**
 * What a workflow or a route throws where the answer is no. Both are plain responses, so that the
 * router shows them on the nearest error page and a resource route answers with them as they are.
 */

/** An object of another lab and one that does not exist answer alike. */
export function notFound(
  sentence = "There is nothing at this address, or it belongs to another lab.",
): Response {
  return refusal(404, sentence);
}

/** The person is known, and may not do this; the sentence says who may. */
export function forbidden(sentence: string): Response {
  return refusal(403, sentence);
}

export function refusal(status: number, sentence: string): Response {
  return new Response(sentence, {
    status,
    headers: { "Content-Type": "text/plain; charset=utf-8" },
  });
}
