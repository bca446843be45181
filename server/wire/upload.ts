/** Body of `POST /api/uploads`. The skid is given as the text of a skid file, or as that of a run already in the store. The person is who is signed in. */
export interface UploadBody {
  readonly title: string
  readonly skid: { readonly name: string; readonly text: string } | { readonly ofRun: number }
  readonly events: { readonly name: string; readonly text: string } | null
  /** Start of the run for logs with elapsed seconds or a bare time of day, RFC 3339; null otherwise. */
  readonly start: string | null
}

export interface Upload {
  readonly upload: string
  readonly logs: readonly { readonly name: string; readonly bytes: number }[]
}
