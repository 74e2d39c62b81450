/** A form with one photo and its caption. */
import {
  FormDataParseError,
  MaxFileSizeExceededError,
  MaxTotalSizeExceededError,
  parseFormData,
} from '@remix-run/form-data-parser'
import { DomainError } from '../domain/errors.ts'
import { PHOTO_MIB } from '../services/permit-photos.server.ts'

export interface PhotoForm {
  caption: string
  fileName: string
  content: AsyncIterable<Uint8Array>
}

/** Reads the form. @throws DomainError too-large, bad-input (no photo, or the form arrived incomplete) */
export async function photoFromForm(request: Request): Promise<PhotoForm> {
  let form: FormData
  try {
    form = await parseFormData(request, { maxFiles: 1, maxFileSize: PHOTO_MIB * 1024 * 1024 })
  } catch (error) {
    if (error instanceof MaxFileSizeExceededError || error instanceof MaxTotalSizeExceededError) {
      throw photoFault(
        `The photo is larger than ${PHOTO_MIB} MiB. Take it at a lower resolution.`,
        'too-large',
      )
    }
    if (error instanceof FormDataParseError) {
      throw photoFault('The form arrived incomplete. Choose the photo and send it again.')
    }
    throw error
  }
  const photo = form.get('photo')
  const caption = form.get('caption')
  if (!(photo instanceof File) || (photo.size === 0 && photo.name === '')) {
    throw photoFault('No photo came with the form. Take or choose one.')
  }
  return {
    caption: typeof caption === 'string' ? caption : '',
    fileName: photo.name,
    content: piecesOf(photo),
  }
}

function photoFault(message: string, code: 'bad-input' | 'too-large' = 'bad-input'): DomainError {
  return new DomainError(code, 'Nothing has been kept.', { fields: { photo: [message] } })
}

async function* piecesOf(photo: File): AsyncGenerator<Uint8Array> {
  const reader = photo.stream().getReader()
  try {
    for (;;) {
      const { value, done } = await reader.read()
      if (done) return
      yield value
    }
  } finally {
    reader.releaseLock()
  }
}
