/** The process answers; whether it can work is for `/ready` to say. */
export function loader() {
  return Response.json({ status: "alive" }, { headers: { "Cache-Control": "no-store" } });
}
