import type { Response } from 'express'

/** Sends a text as a file to keep. The name may hold any letters: it goes out in both forms of RFC 6266. */
export function sendFile(response: Response, file: { readonly text: string; readonly type: 'text/csv' | 'application/json'; readonly fileName: string }): void {
  // Characters that no file system takes, and control characters, which no header takes.
  // eslint-disable-next-line no-control-regex -- control characters are what is removed
  const name = file.fileName.replace(/[\u0000-\u001f\u007f"\\/:*?<>|]+/g, ' ').replace(/\s+/g, ' ').trim()
  response.attachment(name)
  response.type(`${file.type}; charset=utf-8`)
  response.send(file.text)
}
