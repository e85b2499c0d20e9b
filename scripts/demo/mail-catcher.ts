/** Takes every mail that the application sends and shows it on a page of its own; sends nothing on. */
import { createServer, type Server } from "node:http";
import type { AddressInfo } from "node:net";
import { simpleParser } from "mailparser";
import { SMTPServer } from "smtp-server";

interface CaughtMail {
  at: Date;
  from: string;
  to: string;
  subject: string;
  text: string;
}

export interface MailCatcher {
  smtpUrl: string;
  pageUrl: string;
  stop(): Promise<void>;
}

const KEPT = 200;

export async function startMailCatcher(ports: {
  smtp: number;
  page: number;
}): Promise<MailCatcher> {
  const mails: CaughtMail[] = [];
  const smtp = new SMTPServer({
    authOptional: true,
    disabledCommands: ["STARTTLS", "AUTH"],
    onData(stream, _session, done) {
      simpleParser(stream).then((mail) => {
        mails.unshift({
          at: new Date(),
          from: mail.from?.text ?? "",
          to: [mail.to ?? []]
            .flat()
            .map((address) => address.text)
            .join(", "),
          subject: mail.subject ?? "",
          text: mail.text ?? "",
        });
        mails.length = Math.min(mails.length, KEPT);
        done();
      }, done);
    },
  });
  const page = createServer((_request, response) => {
    response.setHeader("content-type", "text/html; charset=utf-8");
    response.setHeader("content-security-policy", "default-src 'none'; style-src 'unsafe-inline'");
    response.end(mailPage(mails));
  });
  const smtpPort = await listen(smtp.server as Server, () => smtp.listen(ports.smtp, "127.0.0.1"));
  const pagePort = await listen(page, () => page.listen(ports.page, "127.0.0.1"));
  return {
    smtpUrl: `smtp://127.0.0.1:${smtpPort}`,
    pageUrl: `http://127.0.0.1:${pagePort}/`,
    stop: async () => {
      await new Promise<void>((resolve) => smtp.close(() => resolve()));
      page.closeAllConnections();
      await new Promise<void>((resolve) => page.close(() => resolve()));
    },
  };
}

function listen(server: Server, start: () => void): Promise<number> {
  return new Promise((resolve, reject) => {
    server.once("error", reject);
    server.once("listening", () => resolve((server.address() as AddressInfo).port));
    start();
  });
}

function mailPage(mails: readonly CaughtMail[]): string {
  const items = mails
    .map(
      (mail) =>
        `<article><h2>${escapeHtml(mail.subject)}</h2><p>${escapeHtml(mail.from)} to ${escapeHtml(mail.to)}, ${mail.at.toISOString()}</p><pre>${escapeHtml(mail.text)}</pre></article>`,
    )
    .join("");
  const body =
    items || "<p>No mail yet. What the demo would send stands here, and goes nowhere else.</p>";
  return `<!doctype html><html lang="en"><meta charset="utf-8"><title>Mail of the demo</title><style>body{font:14px/20px system-ui,sans-serif;max-width:72ch;margin:24px auto;padding:0 16px;background:#f7f3ea;color:#1c2431}article{border-top:1px solid #d8d0bf;padding:12px 0}h1{font-size:20px}h2{font-size:14px;margin:0}pre{white-space:pre-wrap}</style><h1>Mail of the demo</h1>${body}</html>`;
}

function escapeHtml(text: string): string {
  return text.replace(/[&<>"']/g, (character) => `&#${character.charCodeAt(0)};`);
}
