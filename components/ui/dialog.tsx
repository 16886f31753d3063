'use client'

import * as Radix from '@radix-ui/react-dialog'
import type { ReactNode } from 'react'
import { buttonClass } from './button'

export interface DialogProps {
  open: boolean
  onOpenChange: (open: boolean) => void
  title: ReactNode
  /** One sentence: what this does. */
  description?: ReactNode
  children: ReactNode
}

/**
 * A modal sheet. Radix's own overlay is left out: it injects a style element, which the content security
 * policy refuses; globals.css stops the page from scrolling instead.
 */
export function Dialog({ open, onOpenChange, title, description, children }: DialogProps) {
  return (
    <Radix.Root open={open} onOpenChange={onOpenChange}>
      <Radix.Portal>
        {/* As high as the sheets: one that asks about another must darken it too. */}
        <div className="fixed inset-0 z-50 bg-ink/45" aria-hidden="true" />
        <Radix.Content
          data-dialog=""
          {...(description ? {} : { 'aria-describedby': undefined })}
          className="fixed inset-x-3 top-[6vh] z-50 mx-auto max-h-[88vh] max-w-xl overflow-y-auto border-2 border-ink bg-paper p-5 sm:p-7"
        >
          <Radix.Title className="text-2xl">{title}</Radix.Title>
          {description ? (
            <Radix.Description className="mt-2 text-soft">{description}</Radix.Description>
          ) : null}
          <div className="mt-5">{children}</div>
        </Radix.Content>
      </Radix.Portal>
    </Radix.Root>
  )
}

export function DialogActions({ children, closeLabel }: { children?: ReactNode; closeLabel: string }) {
  return (
    <div className="mt-6 flex flex-wrap gap-2">
      {children}
      <Radix.Close className={buttonClass('quiet')}>{closeLabel}</Radix.Close>
    </div>
  )
}
